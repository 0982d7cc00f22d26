// Text of a .tier file -> syntax tree. Spirit X3 stays inside parse.cc.
#pragma once

#include <string>

#include "base/diagnostics.h"
#include "base/source_map.h"
#include "grammar/syntax.h"

namespace tiersmith {

// Requires: the file is UTF-8 (SourceMap::Load saw to that).
// Ensures:  every entry that parses is in the result; each one that does not has a diagnostic with
//           its place, and parsing resumed after it (grammar/notation.md, "Errors").
syntax::File Parse(const SourceMap& sources, std::uint32_t file, Diagnostics& diagnostics);

// The file again, in the notation: Parse(Print(x)) == x up to spans.
std::string Print(const syntax::File& file);

}  // namespace tiersmith
