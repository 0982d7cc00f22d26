// Syntax tree -> checked grammar. Inner header of src/model/check_*.cc: nothing outside includes it.
//
// Order: tree, classes, symbols, diacritics, omit, spelling, words, rules, data; each looks up names only in what stands
// before it here, so that declarations may stand in any order in the file. Tested by
// tests/unit/model/check_test.cc.
#pragma once

#include <map>
#include <memory>
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
#include "model/not_run_yet.h"
#include "model/speller.h"
#include "model/symbol_trie.h"
#include "model/text.h"

namespace tiersmith {

class Checker {
 public:
  Checker(const syntax::File& file, std::uint32_t file_id, Reach reach, Grammar& grammar, Diagnostics& diagnostics);
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
  // `context`: the clause whose α β γ δ the bundle may speak of; null where none may stand.
  struct RuleContext;
  std::optional<SlotTest> ResolveSet(const syntax::Set& set, RuleContext* context = nullptr);
  // A set that symbols are asked for: what only a slot of a form can answer is an error.
  std::optional<SlotTest> ResolveSymbolSet(const syntax::Set& set);
  std::optional<SlotTest> ResolveClass(const syntax::Name& name);
  std::optional<SlotTest> ResolveBundle(const syntax::Bundle& bundle, RuleContext* context);
  // Adds what one part of a bundle asks: one test, or several for Tone:(H L).
  bool AddTests(const syntax::Feat& feat, RuleContext* context, std::vector<FeatureTest>* tests);
  bool AddValueTest(const syntax::Feat& feat, NodeId node, std::vector<FeatureTest>* tests);
  bool AddListTest(const syntax::Feat& feat, NodeId node, std::vector<FeatureTest>* tests);
  void WarnContradictions(const std::vector<FeatureTest>& tests, Span span);
  // May one root or slot bear several of `node`, on one mother or on several?
  bool MayBeContour(NodeId node) const;
  // The index of α in the clause, noting where it stands, or nothing after an error.
  std::optional<int> VariableOf(const syntax::Feat& feat, NodeId node, RuleContext* context);
  std::optional<int> GivenVariable(const syntax::Feat& feat, NodeId node, RuleContext* context);
  // What set, fill, insert, segments and diacritics ask for. False after an error.
  // `context`: of the rule whose `set` or `fill` it is; null for the content of a new root or a symbol.
  bool ResolveSettings(const syntax::Bundle& bundle, RuleContext* context, std::vector<Setting>* settings);
  bool AddSetting(const syntax::Feat& feat, bool continues, RuleContext* context, std::vector<Setting>* settings);
  std::optional<Value> ValueOf(const TreeNode& node, const syntax::Name& value);
  // The symbols of a literal in order, or nothing after an error. Where it gives content, ː behind the one symbol
  // says that it is long.
  std::optional<std::vector<int>> SymbolsOf(const syntax::FormText& literal, bool* is_long = nullptr);
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
  void CheckAbstract();
  void CheckUnspecified();
  void RebuildTrie();
  std::vector<std::string> SymbolNames() const;
  void AddSymbolText(int symbol);

  // ---- check_rules.cc
  struct Variable {  // α β γ δ of one clause
    std::string name;
    NodeId node = 0;       // the first that it speaks of
    Span span;             // where it stands first
    int places = 0;        // where it stands, in patterns and changes
    bool several = false;  // stands in a repeated group: its slots agree with each other
    bool bound = false;    // some item of every match gives it its value
  };
  struct RuleContext {
    Clause* clause = nullptr;
    Domain within = Domain::kWord;
    Span span;                                   // of the rule
    std::vector<Variable>* variables = nullptr;  // of the clause, its `unless` included; null: none may stand
    std::map<std::string, int> mentions;         // classes named as whole items of the `where`
    std::map<std::string, int> own_labels;       // labels of the `where`
    std::set<std::string> used;                  // labels the changes and conditions use
    std::map<std::string, int> inserted;         // labels of inserted items
    bool in_unless = false;
    bool broken = false;                 // the pattern has errors: a label may be missing for that
    int depth = 0;                       // inside groups
    bool repeated = false;               // inside a group whose quantity is not one
    bool alternative = false;            // inside one of several alternatives
    std::vector<std::string> expanding;  // named patterns being expanded
  };
  void CheckRules();
  void CheckRule(const syntax::Rule& written);
  void CheckComplete(const syntax::Complete& written);
  void CheckFusion(const syntax::Fuse& written);
  void CheckFloats();
  // False after an error.
  bool CheckClause(const syntax::Clause& written, const syntax::Rule& whole, const Rule& rule, Clause* clause);
  bool ResolveUnless(const syntax::Pattern& written, const RuleContext& context, Clause* clause);
  bool ResolveCondition(const syntax::Condition& written, bool opposite, RuleContext* context);
  bool ResolveTag(const syntax::TagTest& written, RuleContext* context);
  void WarnLonelyVariables(const RuleContext& context);
  // In a clause that is otherwise fine: the edges by which neighbours of changed items are matched.
  void FaceEdges(Clause* clause) const;
  void CollectUsedLabels(const syntax::Clause& written, RuleContext* context);
  std::optional<Member> MemberOf(const syntax::Path& path, NodeId node);
  void RefuseNotRun(const std::vector<NotYet>& constructs);

  // ---- check_patterns.cc
  void CheckPatterns();
  void CountMentions(const syntax::Pattern& pattern, RuleContext* context);
  bool ResolvePattern(const syntax::Pattern& written, RuleContext* context, Pattern* pattern);
  bool ResolveItem(const syntax::Item& item, RuleContext* context, Pattern* pattern);
  bool ResolveSetItem(const syntax::Item& item, RuleContext* context, Pattern* pattern);
  bool ResolveNameItem(const syntax::Item& item, RuleContext* context, Pattern* pattern);
  bool ResolveOwnLabel(const syntax::Item& item, const RuleContext& context, Pattern* pattern);
  bool ResolveBoundary(const syntax::Item& item, RuleContext* context, Pattern* pattern);
  bool ResolveGap(const syntax::Item& item, const RuleContext& context, Pattern* pattern);
  bool ResolveGroup(const syntax::Item& item, RuleContext* context, Pattern* pattern);
  bool AddLabel(const syntax::Name& label, const syntax::Item& item, RuleContext* context, int* index);
  void Append(PatternItem slot, const syntax::Item& item, Pattern* pattern);
  bool CheckShape(const Pattern& pattern, const syntax::Pattern& written, const RuleContext& context);
  bool CheckSameMorpheme(const syntax::Pattern& written);
  void WarnEdgeInside(const Pattern& pattern, const RuleContext& context);

  // ---- check_changes.cc
  // What may stand in a place that names an item of the clause.
  enum class LabelUse { kSlot, kSlotOrInserted, kSlotOrBoundary };
  std::optional<int> LabelOf(const syntax::Name& name, const RuleContext& context, LabelUse use = LabelUse::kSlot);
  int AddClauseLabel(const std::string& name, Clause::LabelKind kind, Clause* clause);
  // Labels of inserted items, before the changes that use them.
  bool AddInsertedLabels(const syntax::Clause& written, RuleContext* context);
  bool ResolveChange(const syntax::Change& change, RuleContext* context);
  std::optional<NodeId> ChangedNode(const syntax::Path& path);
  bool ResolveLine(const syntax::Change& change, RuleContext* context);
  bool ResolvePair(const syntax::Change& change, RuleContext* context);
  bool ResolveContent(const syntax::Change& change, RuleContext* context);
  bool CheckTakenAway(const syntax::Change& written, const std::vector<Setting>& settings);
  bool ResolveLiteralContent(const syntax::FormText& literal, Change* change);
  bool ResolveSetLiteral(const syntax::Change& change, RuleContext* context);
  bool ResolveInsert(const syntax::Change& change, RuleContext* context);
  bool ResolveTarget(const syntax::Change& change, Change::Op op, RuleContext* context);
  // Which changes cannot stand beside each other in one clause. False after an error.
  bool CheckChanges(const syntax::Rule& written, const Rule& rule, const Clause& clause);
  bool RefuseBeside(const Change& change, const Change& other, const std::string& message, const std::string& first);
  bool CheckBesideLine(const Clause& clause, const Change& line);
  bool CheckBesideMerged(const Clause& clause, const Change& merge);
  bool CheckMergesAcross(const Rule& rule);
  bool CheckBesideReplaced(const Clause& clause, const Change& replacing);
  bool CheckBesideLength(const Clause& clause, const Change& change);
  bool CheckOneChanged(const syntax::Rule& written, const Clause& clause);

  // ---- check_words.cc
  struct WrittenEntry {  // of the grammar or of a table
    syntax::LexiconEntry entry;
    std::string id;
  };
  void LoadLexicons();
  void LoadLexiconTable(std::uint32_t file);
  void CheckWords();
  void AddLexiconEntry(const WrittenEntry& written);
  bool CheckBoundaries(const Morph& morph, MorphemeKind kind);
  std::vector<Morph> MorphsOf(const syntax::FormText& form, bool several);
  bool SayReadings(const syntax::FormText& form, const std::vector<std::string>& texts, bool several);
  void ReportForm(Span span, const TextError& error, bool whole);
  void CheckParadigm(const syntax::Paradigm& written);
  void CheckSuppletion();
  bool CheckSlots(const syntax::Paradigm& written, Paradigm* paradigm);
  bool CheckOverride(const syntax::CellOverride& written, Paradigm* paradigm);
  bool CheckAllomorphs(const std::vector<syntax::Allomorph>& written, SlotValue* value);
  std::optional<MorphemeKind> AffixKind(const Morph& morph);
  void CheckTags();
  // A set that is asked of one segment beside a form or a letter.
  std::optional<SlotTest> ResolveContext(const syntax::Set& set);
  // Requires: the inventory is complete; of letters: the spelling too.
  const Reader& FormTexts();
  const Speller& Letters();

  // ---- check_spelling.cc
  void CheckSpelling();
  void CheckSpellingLine(const syntax::SpellingLine& written);
  void CheckDoubled(const syntax::LengthDoubled& written);
  std::optional<std::vector<Token>> MeaningOf(const syntax::Name& means);

  // ---- check_data.cc
  void LoadDataFiles();
  void LoadDataTable(const syntax::DataFrom& from, std::uint32_t file);
  void CheckData();
  struct Unread {  // an error of a form, and how many further forms have the same
    Diagnostic diagnostic;
    int further = 0;
  };
  void NoteUnread(const TextError& error, Span span, std::vector<Unread>* unread);

  // One mistake in a declaration makes every use of the name an error: after a few of them the rest is not
  // said.
  bool SaidOften(const std::string& name) { return ++said_[name] > 3; }
  void Error(Kind kind, Span span, std::string message, std::string remedy) {
    diagnostics_.Error(kind, span, std::move(message), std::move(remedy));
  }

  const syntax::File& file_;
  const Span whole_;
  const Reach reach_;
  Grammar& grammar_;
  Diagnostics& diagnostics_;

  std::map<std::string, const syntax::Class*> classes_;
  std::map<std::string, SlotTest> resolved_classes_;
  std::set<std::string> failed_classes_;
  std::vector<std::string> resolving_;  // classes being resolved
  std::map<std::string, const syntax::NamedPattern*> patterns_;
  std::set<std::string> failed_patterns_;
  bool sharing_blocked_ = false;  // for the whole grammar
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
  std::vector<WrittenEntry> written_entries_;
  std::unique_ptr<Reader> reader_;
  std::unique_ptr<Speller> speller_;
};

}  // namespace tiersmith
