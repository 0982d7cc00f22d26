// The text of every file a grammar was read from. Spans point into it.
#pragma once

#include <cstdint>
#include <map>
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
  // The same of bytes that were read already.
  bool AddBytes(const std::string& path, std::string bytes, Span from, Diagnostics& diagnostics, std::uint32_t* id);

  // Parts of a grammar are files with a name of their own, the same wherever the grammar lies: relative to its folder
  // ("velmari.tier", "data/survey.tsv"), or in the library ("<library>/ipa/segments.tsv"). A part is read once.
  bool LoadPart(const std::string& path, const std::string& name, Span from, Diagnostics& diagnostics,
                std::uint32_t* id);
  // A part named in another one, at `from`: a relative path is looked for beside that one.
  bool LoadBeside(const std::string& written, Span from, Diagnostics& diagnostics, std::uint32_t* id);
  // Makes a file that is here a part.
  void NamePart(std::uint32_t file, std::string name);
  // The parts are these texts from now on, by name, and no file is read for one (machine files).
  void Seal(std::map<std::string, std::string> parts);
  bool sealed() const { return sealed_; }

  std::string_view text(std::uint32_t file) const { return files_[file].text; }
  const std::string& path(std::uint32_t file) const { return files_[file].path; }
  const std::string& name(std::uint32_t file) const { return files_[file].name; }  // "": not a part
  std::size_t size() const { return files_.size(); }
  // Where a span begins; a place with an empty path if its file is not here (kNoFile).
  Place Find(Span span) const;

 private:
  struct File {
    std::string path;
    std::string text;
    int first_line = 1;
    std::string name;
  };
  std::vector<File> files_;
  bool sealed_ = false;
  std::map<std::string, std::string> sealed_parts_;
};

// The bytes of a file ("-": standard input), or false and kMissingFile at `from`.
bool ReadBytes(const std::string& path, Span from, Diagnostics& diagnostics, std::string* bytes);

}  // namespace tiersmith
