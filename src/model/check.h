// Syntax tree -> checked grammar. Inner header of src/model/check_*.cc: nothing outside includes it.
//
// Order: tree, classes, symbols, diacritics, omit, rules, data; each looks up names only in what stands
// before it here, so that declarations may stand in any order in the file. Tested by
// tests/unit/model/check_test.cc.
#pragma once

#include <map>
#include <optional>
#include <set>
#include <string>
#include <string_view>
#include <utility>
#include <vector>

#include "grammar/syntax.h"
#include "model/grammar.h"
#include "model/library.h"
#include "model/names.h"
#include "model/symbol_trie.h"

namespace tiersmith {

class Checker {
 public:
  Checker(const syntax::File& file, std::uint32_t file_id, Grammar& grammar, Diagnostics& diagnostics);
  // Requires: grammar.sources is set. Ensures: grammar is complete if no error was added.
  void Run();

 private:
  // ---- check_tree.cc
  void CheckTree();
  void CheckRooms();
  bool SaysLiteral(const syntax::Set& set, std::size_t depth) const;
  std::vector<std::string> NodeNames() const;
  // A node by name, or an error of kind `kind` at the name.
  std::optional<NodeId> NodeOf(const syntax::Name& name, Kind kind);
  bool IsSlotBorne(NodeId node) const { return node != kSlotNode && !grammar_.tree.Dominates(kRootNode, node); }

  // ---- check_sets.cc
  std::optional<SlotTest> ResolveSet(const syntax::Set& set);
  std::optional<SlotTest> ResolveClass(const syntax::Name& name);
  std::optional<SlotTest> ResolveBundle(const syntax::Bundle& bundle);
  std::optional<FeatureTest> ResolveFeature(const syntax::Feat& feat);
  void WarnContradictions(const std::vector<FeatureTest>& tests, Span span);
  // What set, fill, insert, segments and diacritics ask for. False after an error.
  bool ResolveSettings(const syntax::Bundle& bundle, std::vector<Setting>* settings);
  bool AddSetting(const syntax::Feat& feat, bool continues, std::vector<Setting>* settings);
  std::optional<Value> ValueOf(const TreeNode& node, const syntax::Name& value);
  // The symbols of a literal in order, or nothing after an error.
  std::optional<std::vector<int>> SymbolsOf(const syntax::FormText& literal);
  SlotTest LiteralTest(int symbol);
  void CheckClasses();
  std::vector<std::string> ClassNames() const;

  // ---- check_inventory.cc
  struct Entry {
    const syntax::SegmentEntry* entry = nullptr;
    const syntax::Segments* block = nullptr;
    enum class State { kNew, kBusy, kDone, kFailed } state = State::kNew;
    FeatureTree raw;  // before `without`
  };
  struct Sign {  // a checked diacritic
    std::vector<Setting> settings;
    std::optional<SlotTest> on;
    bool usable = false;
  };
  void CheckInventory();
  void CollectEntries();
  void AddEntry(const syntax::SegmentEntry& entry, const syntax::Segments& block);
  bool IsFull(const Entry& entry) const { return entry.entry->like || entry.entry->bundle || entry.block->added; }
  void BuildTrees();
  bool Build(std::size_t id);
  const FeatureTree* FromLibrary(const syntax::Name& symbol, const syntax::Segments& block, FeatureTree* content);
  Library* LibraryOf(const syntax::Name* name, Span span);
  void Apply(const std::vector<Setting>& settings, FeatureTree* root);
  bool HasRoom(const FeatureTree& root, NodeId* full) const;
  bool HasRoomUnder(const FeatureTree& content, const FeatureTree& root, NodeId* full) const;
  void TakeWithout();
  bool SymbolPasses(const SlotTest& test, int symbol) const;
  // The node and values a line of `without` or `omit` lists; empty after an error.
  std::vector<std::pair<NodeId, Value>> ResolveValues(const syntax::ValueRef& ref, Span span, const char* verb);
  void CheckDiacritics();
  bool MayBear(const FeatureTree& content, const Sign& sign) const;
  void BuildComposites();
  void AddComposite(int base, std::vector<int> marks);
  void AddWrittenComposites();
  void AddCompositesOf(std::string_view text, const SymbolTrie& listed);
  void CheckOmit();
  void CheckFallTogether();
  void CheckUnspecified();
  void RebuildTrie();
  std::vector<std::string> SymbolNames() const;
  void AddSymbolText(int symbol);

  // ---- check_rules.cc
  struct RuleContext {
    Rule* rule = nullptr;
    std::map<std::string, int> mentions;    // classes named as whole items of the `where`
    std::map<std::string, int> own_labels;  // label -> index
    std::set<std::string> used;             // labels the changes and conditions use
    std::set<std::string> inserted;         // labels of inserted items
    std::set<std::string> placed;           // those checked so far
    bool in_unless = false;
    bool broken = false;                 // the pattern has errors: a label may be missing for that
    int depth = 0;                       // inside groups
    bool repeated = false;               // inside a group whose quantity is not one
    bool alternative = false;            // inside one of several alternatives
    std::vector<std::string> expanding;  // named patterns being expanded
  };
  void CheckPatterns();
  void CheckRules();
  void CheckRule(const syntax::Rule& written);
  void CountMentions(const syntax::Pattern& pattern, RuleContext* context);
  void CollectUsedLabels(const syntax::Rule& written, RuleContext* context);
  bool ResolvePattern(const syntax::Pattern& written, RuleContext* context, Pattern* pattern);
  bool ResolveItem(const syntax::Item& item, RuleContext* context, Pattern* pattern);
  bool ResolveSetItem(const syntax::Item& item, RuleContext* context, Pattern* pattern);
  bool ResolveNameItem(const syntax::Item& item, RuleContext* context, Pattern* pattern);
  bool ResolveGroup(const syntax::Item& item, RuleContext* context, Pattern* pattern);
  bool AddLabel(const syntax::Name& label, const syntax::Item& item, RuleContext* context, int* index);
  void Append(PatternItem slot, const syntax::Item& item, Pattern* pattern);
  bool CheckShape(const Pattern& pattern, const syntax::Pattern& written, const RuleContext& context);
  std::optional<int> LabelOf(const syntax::Name& name, const RuleContext& context);
  bool ResolveChange(const syntax::Change& change, RuleContext* context);
  bool ResolveLine(const syntax::Change& change, RuleContext* context);
  bool ResolveContent(const syntax::Change& change, RuleContext* context);
  bool ResolveInsert(const syntax::Change& change, RuleContext* context);
  bool Changeable(NodeId node, Span span);
  void CheckChanges(const syntax::Rule& written, const Rule& rule);
  bool CheckBesideLine(const Rule& rule, const Change& line);
  bool CheckBesideTaken(const Rule& rule, const Change& taking);
  void CheckOneChanged(const syntax::Rule& written, const Rule& rule);

  // ---- check_data.cc
  void LoadDataFiles();
  void CheckData();
  struct Unread {  // an error of a form, and how many further forms have the same
    Diagnostic diagnostic;
    int further = 0;
  };
  void CheckForm(std::string_view text, Span span, bool underlying, const class Reader& reader,
                 std::vector<Unread>* unread);

  // One mistake in a declaration makes every use of the name an error: after a few of them the rest is not
  // said.
  bool SaidOften(const std::string& name) { return ++said_[name] > 3; }
  void Error(Kind kind, Span span, std::string message, std::string remedy) {
    diagnostics_.Error(kind, span, std::move(message), std::move(remedy));
  }

  const syntax::File& file_;
  const Span whole_;
  Grammar& grammar_;
  Diagnostics& diagnostics_;

  std::map<std::string, const syntax::Class*> classes_;
  std::map<std::string, SlotTest> resolved_classes_;
  std::set<std::string> failed_classes_;
  std::vector<std::string> resolving_;  // classes being resolved
  std::map<std::string, const syntax::NamedPattern*> patterns_;
  std::set<std::string> failed_patterns_;
  std::vector<std::pair<NodeId, const syntax::Set*>> rooms_;
  std::vector<Entry> entries_;  // beside Inventory::symbols
  std::vector<Sign> signs_;     // beside Inventory::marks
  std::vector<std::pair<std::pair<NodeId, Value>, SlotTest>> without_;
  std::map<std::string, Library> libraries_;
  std::set<std::string> failed_libraries_;
  std::set<NodeId> given_;  // nodes some bundle of the inventory gives
  bool from_library_ = false;
  std::map<std::string, int> said_;
  SymbolTrie trie_;
};

}  // namespace tiersmith
