// A grammar file and the files it includes, as one syntax tree.
//
// Example: `include "base.tier"` at the top of dialect.tier puts the declarations of base.tier, which lies beside it, before
// those of dialect.tier. A file that is reached twice counts once. Spans keep their own files, so messages point
// where the words stand. Tested by tests/unit/model/includes_test.cc.
#pragma once

#include <cstdint>

#include "base/diagnostics.h"
#include "base/source_map.h"
#include "grammar/syntax.h"

namespace tiersmith {

// No `Include` is left in the result. Errors: a file that cannot be read, a circle of files.
syntax::File ParseWithIncludes(std::uint32_t file, SourceMap& sources, Diagnostics& diagnostics);

}  // namespace tiersmith
