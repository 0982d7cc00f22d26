// What the model's tests share: grammars from text, what a symbol bears, messages with the text they point at.
#pragma once

#include <catch2/catch.hpp>
#include <initializer_list>
#include <memory>
#include <sstream>
#include <string>
#include <vector>

#include "model/content.h"
#include "model/grammar.h"
#include "model/text.h"

namespace tiersmith::testing {

// Every node the library knows, each once.
inline const char* const kFullTree = R"(
tree {
  root    > ±cons ±son ±syll ±nasal ×2 in [-son] ±lateral ±strident ±cont ×2 in [-son] ±tense trill tap click
  root    > Laryngeal > ±voice sg cg
  root    > Place > •Labial •Coronal •Dorsal •Radical
  Labial  > round labiodental
  Coronal > ±anterior ±distributed
  Dorsal  > ±high ±low ±back
  Radical > ±atr rtr
}
)";
// A tree small enough to write contents down.
inline const char* const kSmallTree = R"(
tree {
  root > ±son ±syll ±nasal ±cont ×2 in [-son]
  root > Laryngeal > ±voice
  root > Place > •Labial •Coronal •Dorsal
  Labial > round
  Dorsal > ±high ±back
}
)";

inline const std::string kSmallHead = std::string(kSmallTree) + "segments from \"ipa\" { p t n s i u a }\n";

struct Loaded {
  std::shared_ptr<SourceMap> sources = std::make_shared<SourceMap>();
  Diagnostics diagnostics;
  std::unique_ptr<Grammar> grammar;

  // "kind-number|text the span covers" of each message, in order.
  std::string Covered(const Diagnostic& d) const {
    if (d.span.file >= sources->size()) return "";
    return std::string(sources->text(d.span.file).substr(d.span.begin, d.span.end - d.span.begin));
  }
  std::string Messages() const {
    std::string all;
    for (const Diagnostic& d : diagnostics.all()) all += d.message + " @ '" + Covered(d) + "' help: " + d.remedy + "\n";
    return all;
  }
};

inline Loaded Load(const std::string& text, Reach reach = Reach::kRunnable) {
  Loaded loaded;
  loaded.grammar = LoadGrammarText("t.tier", text, loaded.sources, loaded.diagnostics, reach);
  return loaded;
}

inline Loaded LoadOrFail(const std::string& text, Reach reach = Reach::kRunnable) {
  Loaded loaded = Load(text, reach);
  INFO(loaded.Messages());
  REQUIRE(loaded.grammar != nullptr);
  return loaded;
}

// One mistake in a grammar, and what is said of it.
struct Mistake {
  const char* text;
  Kind kind;
  const char* covered;  // the text under the caret
  const char* says;     // a part of message and remedy
};

inline void CheckRows(const std::string& head, std::initializer_list<Mistake> rows,
                      Severity severity = Severity::kError, Reach reach = Reach::kRunnable) {
  for (const Mistake& row : rows) {
    const Loaded loaded = Load(head + row.text, reach);
    CAPTURE(row.text);
    INFO(loaded.Messages());
    CHECK((loaded.grammar == nullptr) == (severity == Severity::kError));
    REQUIRE(loaded.diagnostics.all().size() == 1);  // one mistake, one message
    const Diagnostic& d = loaded.diagnostics.all()[0];
    CHECK(d.kind == row.kind);
    CHECK(d.severity == severity);
    CHECK(loaded.Covered(d) == row.covered);
    CHECK((d.message + " | " + d.remedy).find(row.says) != std::string::npos);
    CHECK_FALSE(d.remedy.empty());
  }
}

// "root[+son Place[•Dorsal[+high]]]"
inline std::string Show(const FeatureTree& content, const Tree& tree) {
  Form form;
  form.instances.push_back({kSlotNode, 0, {}});
  const InstanceId root = AddContent(form, content);
  form.instances[0].daughters = {root};
  form.items.push_back({FormItem::Kind::kSlot, Boundary::kNone, 0});
  const std::string dump = Dump(form, tree);
  return dump.substr(3, dump.size() - 4);  // without s1[ ]
}

inline const Symbol& SymbolNamed(const Grammar& grammar, const std::string& text) {
  INFO(text);
  const std::optional<int> id = grammar.inventory.Find(text);
  REQUIRE(id.has_value());
  return grammar.inventory.symbols[static_cast<std::size_t>(*id)];
}

// Does the content bear all this says? "+cons, sg, no Place": words as in a bundle, a comma after each.
inline std::string Missing(const FeatureTree& content, const Tree& tree, const std::string& bundle) {
  std::istringstream words(bundle);
  std::string missing;
  bool no = false;
  for (std::string word; words >> word;) {
    if (word == "no") {
      no = true;
      continue;
    }
    const bool valued = word[0] == '+' || word[0] == '-';
    const std::optional<NodeId> node = tree.Find(valued ? word.substr(1) : word);
    REQUIRE(node.has_value());
    const bool there = valued ? BearsValue(content, *node, word[0] == '+' ? 1 : 0) : Bears(content, *node);
    if (there == no) missing += (no ? "no " : "") + word + " ";
    no = false;
  }
  return missing;
}

}  // namespace tiersmith::testing
