// Diagnostics as values. See diagnostics.h. Tested by tests/unit/base/ and tests/golden/.
#include "base/diagnostics.h"

namespace tiersmith {

const char* KindName(Kind kind) {
  switch (kind) {
    case Kind::kMissingFile:
      return "missing-file";
    case Kind::kNotUtf8:
      return "not-utf8";
    case Kind::kIncludeCircle:
      return "include-circle";
    case Kind::kForeignFile:
      return "foreign-file";
    case Kind::kTruncatedFile:
      return "truncated-file";
    case Kind::kAlteredFile:
      return "altered-file";
    case Kind::kNewerFile:
      return "newer-file";
    case Kind::kOtherLayout:
      return "other-layout";
    case Kind::kSyntax:
      return "syntax";
    case Kind::kUnclosedBlock:
      return "unclosed-block";
    case Kind::kUnclosedForm:
      return "unclosed-form";
    case Kind::kReservedWord:
      return "reserved-word";
    case Kind::kNotSupportedYet:
      return "not-supported-yet";
    case Kind::kUnknownFeature:
      return "unknown-feature";
    case Kind::kUnknownNode:
      return "unknown-node";
    case Kind::kUnknownClass:
      return "unknown-class";
    case Kind::kUnknownLabel:
      return "unknown-label";
    case Kind::kUnknownSymbol:
      return "unknown-symbol";
    case Kind::kDuplicate:
      return "duplicate";
    case Kind::kBadTree:
      return "bad-tree";
    case Kind::kBadValue:
      return "bad-value";
    case Kind::kSymbolsFallTogether:
      return "symbols-fall-together";
    case Kind::kUnspecifiedFeature:
      return "unspecified-feature";
    case Kind::kBadRule:
      return "bad-rule";
    case Kind::kNeverApplies:
      return "never-applies";
    case Kind::kNoSymbol:
      return "no-symbol";
    case Kind::kAmbiguousRule:
      return "ambiguous-rule";
    case Kind::kReachesOtherRoot:
      return "reaches-other-root";
    case Kind::kBadLexicon:
      return "bad-lexicon";
    case Kind::kBadParadigm:
      return "bad-paradigm";
    case Kind::kBadSpelling:
      return "bad-spelling";
    case Kind::kUnknownTag:
      return "unknown-tag";
    case Kind::kSeveralReadings:
      return "several-readings";
    case Kind::kUnknownCharacter:
      return "unknown-character";
    case Kind::kBadForm:
      return "bad-form";
    case Kind::kBadData:
      return "bad-data";
    case Kind::kLimit:
      return "limit";
  }
  return "";
}

const std::vector<Kind>& AllKinds() {
  static const std::vector<Kind> kinds = [] {
    std::vector<Kind> all;
    for (int i = 0; i <= static_cast<int>(Kind::kLimit); ++i) all.push_back(static_cast<Kind>(i));
    return all;
  }();
  return kinds;
}

const char* SeverityName(Severity severity) {
  switch (severity) {
    case Severity::kError:
      return "error";
    case Severity::kWarning:
      return "warning";
    case Severity::kNote:
      return "note";
  }
  return "";
}

void Diagnostics::Add(Diagnostic diagnostic) {
  if (diagnostic.severity == Severity::kError) ++errors_;
  all_.push_back(std::move(diagnostic));
}

void Diagnostics::Error(Kind kind, Span span, std::string message, std::string remedy) {
  Add({kind, Severity::kError, span, std::move(message), std::move(remedy), {}});
}

void Diagnostics::Warning(Kind kind, Span span, std::string message, std::string remedy) {
  Add({kind, Severity::kWarning, span, std::move(message), std::move(remedy), {}});
}

}  // namespace tiersmith
