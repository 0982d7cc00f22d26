// Diagnostics as text for people and as JSON for editors. Returns strings; printing is the command's business.
// Tested by tests/unit/base/ and tests/golden/.
#pragma once

#include <string>

#include "base/diagnostics.h"
#include "base/source_map.h"

namespace tiersmith {

//   velmari.tier:12:21: error: the tree has no feature 'nasl' [unknown-feature]
//    12 | rule "r" { where X:[+nasl] delete X }
//       |                     ^~~~~
//     help: did you mean 'nasal'?
std::string RenderDiagnostic(const Diagnostic& diagnostic, const SourceMap& sources, bool color);
std::string RenderDiagnostics(const Diagnostics& diagnostics, const SourceMap& sources, bool color);

// An array of { kind, severity, file, line, column, end_line, end_column, message, help, also: [...] }; lines and
// columns from 1, columns in code points, the end one past the last.
std::string RenderDiagnosticsJson(const Diagnostics& diagnostics, const SourceMap& sources);

}  // namespace tiersmith
