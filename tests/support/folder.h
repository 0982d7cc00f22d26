// A folder of a test's own, gone at its end.
#pragma once

#include <unistd.h>

#include <filesystem>
#include <fstream>
#include <string>

namespace tiersmith::testing {

class Folder {
 public:
  Folder() : path_(std::filesystem::temp_directory_path() / ("tiersmith-" + std::to_string(getpid()) + "-" + Next())) {
    std::filesystem::create_directories(path_);
  }
  ~Folder() { std::filesystem::remove_all(path_); }
  Folder(const Folder&) = delete;
  Folder& operator=(const Folder&) = delete;

  std::string Path(const std::string& name) const { return (path_ / name).string(); }
  // Writes a file, folders between included; its path.
  std::string Write(const std::string& name, const std::string& content) const {
    std::filesystem::create_directories((path_ / name).parent_path());
    std::ofstream(path_ / name, std::ios::binary) << content;
    return Path(name);
  }

 private:
  static std::string Next() {
    static int made = 0;
    return std::to_string(++made);
  }

  std::filesystem::path path_;
};

}  // namespace tiersmith::testing
