// Diagnostics are values: a kind, a place, a message, a remedy. Stages collect them; only the
// command line prints them (base/render_diagnostics.h), and the library never aborts.
#pragma once

#include <cstdint>
#include <string>
#include <utility>
#include <vector>

namespace tiersmith {

// The file of a span that points nowhere.
inline constexpr std::uint32_t kNoFile = 0xFFFFFFFF;

// Byte range [begin, end) of a source file held by a SourceMap.
struct Span {
  std::uint32_t file = 0;
  std::uint32_t begin = 0;
  std::uint32_t end = 0;
};

enum class Severity { kError, kWarning, kNote };

// One entry per kind of message; tests/golden/ holds at least one example of each, and a unit
// test checks that none is forgotten. The printed code is the name in kebab case.
enum class Kind {
  // reading files
  kMissingFile,
  kNotUtf8,
  kIncludeCircle,
  kForeignFile,
  kTruncatedFile,
  kAlteredFile,
  kNewerFile,
  kOtherLayout,
  // notation
  kSyntax,
  kUnclosedBlock,
  kUnclosedForm,
  kReservedWord,
  kNotSupportedYet,
  // names
  kUnknownFeature,
  kUnknownNode,
  kUnknownClass,
  kUnknownLabel,
  kUnknownSymbol,
  kDuplicate,
  // tree and inventory
  kBadTree,
  kBadValue,
  kSymbolsFallTogether,
  kUnspecifiedFeature,
  // rules
  kBadRule,
  kNeverApplies,
  kNoSymbol,
  kAmbiguousRule,
  kReachesOtherRoot,
  // words
  kBadLexicon,
  kBadParadigm,
  kBadSpelling,
  kUnknownTag,
  kSeveralReadings,
  // forms and data
  kUnknownCharacter,
  kBadForm,
  kBadData,
  // limits
  kLimit,
};

// "unknown-feature".
const char* KindName(Kind kind);
// Every kind, in order of declaration.
const std::vector<Kind>& AllKinds();
// "error", "warning", "note".
const char* SeverityName(Severity severity);

struct Diagnostic {
  Kind kind = Kind::kSyntax;
  Severity severity = Severity::kError;
  Span span;
  std::string message;
  std::string remedy;                              // what to do about it; printed after "help: "
  std::vector<std::pair<Span, std::string>> also;  // e.g. "first declared here"
};

class Diagnostics {
 public:
  void Add(Diagnostic diagnostic);
  void Error(Kind kind, Span span, std::string message, std::string remedy);
  void Warning(Kind kind, Span span, std::string message, std::string remedy);
  bool HasErrors() const { return errors_ > 0; }
  const std::vector<Diagnostic>& all() const { return all_; }

 private:
  std::vector<Diagnostic> all_;
  int errors_ = 0;
};

}  // namespace tiersmith
