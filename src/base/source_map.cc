// Source texts and places in them. See source_map.h. Tested by tests/unit/base/source_map_test.cc.
#include "base/source_map.h"

#include <algorithm>
#include <cerrno>
#include <cstdio>
#include <cstring>
#include <filesystem>
#include <fstream>
#include <iostream>
#include <iterator>

#include "base/utf8.h"

namespace tiersmith {
namespace {

// "" and *why set when it cannot be read.
bool ReadAll(const std::string& path, std::string* text, std::string* why) {
  if (path == "-") {
    text->assign(std::istreambuf_iterator<char>(std::cin), {});
    return true;
  }
  std::error_code error;
  if (std::filesystem::is_directory(path, error)) {
    *why = "it is a folder";
    return false;
  }
  errno = 0;
  std::ifstream in(path, std::ios::binary);
  if (!in) {
    *why = errno == 0 || errno == ENOENT ? "there is no such file" : std::strerror(errno);
    return false;
  }
  text->assign(std::istreambuf_iterator<char>(in), {});
  if (in.bad()) {
    *why = "reading it failed";
    return false;
  }
  return true;
}

// Malformed bytes become U+FFFD, so that the line can be shown.
std::string Readable(std::string_view text) {
  std::string readable;
  for (std::size_t position = 0; position < text.size();) {
    AppendCodePoint(readable, NextCodePoint(text, &position));
  }
  return readable;
}

bool LooksLikeUtf16(std::string_view text) {
  return text.size() >= 2 && (text.substr(0, 2) == "\xFF\xFE" || text.substr(0, 2) == "\xFE\xFF");
}

}  // namespace

bool ReadBytes(const std::string& path, Span from, Diagnostics& diagnostics, std::string* bytes) {
  std::string why;
  if (ReadAll(path, bytes, &why)) return true;
  diagnostics.Error(Kind::kMissingFile, from, "cannot read '" + path + "': " + why,
                    "check the path; a file named in a grammar is looked for beside that grammar");
  return false;
}

std::uint32_t SourceMap::Add(std::string path, std::string text, int first_line) {
  files_.push_back({std::move(path), std::move(text), first_line, ""});
  return static_cast<std::uint32_t>(files_.size() - 1);
}

bool SourceMap::Load(const std::string& path, Span from, Diagnostics& diagnostics, std::uint32_t* id) {
  std::string bytes;
  return ReadBytes(path, from, diagnostics, &bytes) && AddBytes(path, std::move(bytes), from, diagnostics, id);
}

bool SourceMap::LoadPart(const std::string& path, const std::string& name, Span from, Diagnostics& diagnostics,
                         std::uint32_t* id) {
  const auto known = std::find_if(files_.begin(), files_.end(), [&](const File& file) { return file.name == name; });
  if (known != files_.end()) {
    *id = static_cast<std::uint32_t>(known - files_.begin());
    return true;
  }
  const auto part = sealed_parts_.find(name);
  if (sealed_ && part == sealed_parts_.end()) {
    diagnostics.Error(Kind::kMissingFile, from, "the machine file does not hold '" + name + "'",
                      "compile the grammar again: `compile GRAMMAR -o FILE`");
    return false;
  }
  const bool read = sealed_ ? AddBytes(name, part->second, from, diagnostics, id) : Load(path, from, diagnostics, id);
  if (read) NamePart(*id, name);
  return read;
}

bool SourceMap::LoadBeside(const std::string& written, Span from, Diagnostics& diagnostics, std::uint32_t* id) {
  namespace fs = std::filesystem;
  // Below an absolute path operator/ keeps that path alone, which is what is wanted.
  const fs::path path = fs::path(files_[from.file].path).parent_path() / written;
  const fs::path name = fs::path(files_[from.file].name).parent_path() / written;
  return LoadPart(path.string(), name.lexically_normal().string(), from, diagnostics, id);
}

void SourceMap::NamePart(std::uint32_t file, std::string name) { files_[file].name = std::move(name); }

void SourceMap::Seal(std::map<std::string, std::string> parts) {
  sealed_ = true;
  sealed_parts_ = std::move(parts);
}

bool SourceMap::AddBytes(const std::string& path, std::string text, Span from, Diagnostics& diagnostics,
                         std::uint32_t* id) {
  const std::string shown = path == "-" ? "<stdin>" : path;
  if (text.compare(0, 3, "\xEF\xBB\xBF") == 0) text.erase(0, 3);
  const std::size_t bad = FirstBadByte(text);
  if (bad == std::string::npos) {
    *id = Add(shown, std::move(text));
    return true;
  }
  char byte[8];
  std::snprintf(byte, sizeof byte, "0x%02X", static_cast<unsigned>(static_cast<unsigned char>(text[bad])));
  const bool utf16 = LooksLikeUtf16(text);
  const auto begin = static_cast<std::uint32_t>(Readable(std::string_view(text).substr(0, bad)).size());
  *id = Add(shown, Readable(text));
  Diagnostic diagnostic;
  diagnostic.kind = Kind::kNotUtf8;
  diagnostic.span = {*id, begin, begin + 3};
  diagnostic.message =
      std::string("this file is not UTF-8: byte ") + byte + (utf16 ? " begins a UTF-16 file" : " cannot stand here");
  diagnostic.remedy =
      utf16 ? "save the file as UTF-8, or convert it: iconv -f UTF-16 -t UTF-8"
            : "save the file as UTF-8, or convert it from what it is, for example: iconv -f LATIN1 -t UTF-8";
  if (from.file < files_.size() && from.file != *id) diagnostic.also.push_back({from, "read from here"});
  diagnostics.Add(std::move(diagnostic));
  return false;
}

SourceMap::Place SourceMap::Find(Span span) const {
  Place place;
  if (span.file >= files_.size()) return place;
  const std::string_view text = files_[span.file].text;
  place.path = files_[span.file].path;
  const std::size_t begin = std::min<std::size_t>(span.begin, text.size());
  const std::size_t before = begin == 0 ? std::string_view::npos : text.rfind('\n', begin - 1);
  const std::size_t line_begin = before == std::string_view::npos ? 0 : before + 1;
  std::size_t line_end = std::min(text.find('\n', begin), text.size());
  if (line_end > line_begin && text[line_end - 1] == '\r') --line_end;
  const std::string_view line = text.substr(line_begin, line_end - line_begin);
  const std::string_view left = line.substr(0, std::min(begin - line_begin, line.size()));
  const std::size_t end = std::clamp<std::size_t>(span.end, begin, std::max(begin, line_end));
  place.line = files_[span.file].first_line +
               static_cast<int>(std::count(text.begin(), text.begin() + static_cast<std::ptrdiff_t>(line_begin), '\n'));
  place.column = 1 + static_cast<int>(CountCodePoints(left));
  place.line_text = std::string(line);
  place.caret_column = DisplayWidth(left);
  place.caret_width = std::max(1, DisplayWidth(text.substr(begin, end - begin)));
  return place;
}

}  // namespace tiersmith
