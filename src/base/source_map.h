// The text of every file a grammar was read from. Spans point into it.
#pragma once

#include <cstdint>
#include <string>
#include <string_view>
#include <vector>

#include "base/diagnostics.h"

namespace tiersmith {

class SourceMap {
 public:
  struct Place {
    std::string path;
    int line = 1;    // from 1
    int column = 1;  // from 1, counted in code points
    std::string line_text;
    int caret_column = 0;  // display cells before the caret (combining marks count 0, a tab 1)
    int caret_width = 1;   // display cells under the caret, at least 1
  };

  // Adds a text under a path as the user wrote it; its first line is counted as `first_line`. Ids count from 0.
  std::uint32_t Add(std::string path, std::string text, int first_line = 1);
  // Reads a file ("-": standard input); a byte order mark is dropped. On failure adds kMissingFile at `from`, or
  // kNotUtf8 at the first bad byte, and returns false.
  bool Load(const std::string& path, Span from, Diagnostics& diagnostics, std::uint32_t* id);

  std::string_view text(std::uint32_t file) const { return files_[file].text; }
  const std::string& path(std::uint32_t file) const { return files_[file].path; }
  std::size_t size() const { return files_.size(); }
  // Where a span begins; a place with an empty path if its file is not here (kNoFile).
  Place Find(Span span) const;

 private:
  struct File {
    std::string path;
    std::string text;
    int first_line = 1;
  };
  std::vector<File> files_;
};

}  // namespace tiersmith
