#include "compile/cascade.h"

#include <fmt/format.h>

#include <algorithm>
#include <chrono>
#include <map>
#include <set>

#include "compile/cascade_data.h"
#include "compile/compose.h"
#include "compile/flatten.h"
#include "compile/plan.h"
#include "compile/rule_machine.h"
#include "graph/interpreter.h"
#include "model/readings.h"

namespace tiersmith {
namespace {

double Seconds(std::chrono::steady_clock::time_point since) {
  return std::chrono::duration<double>(std::chrono::steady_clock::now() - since).count();
}

std::size_t BytesOf(const Tape& tape) {
  std::size_t bytes = tape.arcs.size() * (sizeof(std::vector<TapeArc>) + 1) + tape.ArcCount() * sizeof(TapeArc);
  for (int i = 0; i < tape.symbols.size(); ++i) bytes += tape.symbols[i].size() * sizeof(std::int32_t);
  return bytes;
}

class CascadeCompiler {
 public:
  // Past a cut what comes in is followed exactly, or taken to be any string of the letters that come in: that is much faster, and
  // enough as long as nothing is found that may be wrong (`suspicious`).
  enum class PastCuts { kAnyString, kExactly };

  CascadeCompiler(const Grammar& grammar, const Limits& limits, Diagnostics& diagnostics,
                  const std::vector<Letter>* testing, PastCuts past_cuts)
      : grammar_(grammar),
        steps_(StepsOf(grammar)),
        limits_(limits),
        diagnostics_(diagnostics),
        testing_(testing != nullptr),
        past_cuts_(past_cuts),
        plan_(MakePlan(grammar, testing_)),
        data_(std::make_unique<CascadeData>()) {
    data_->grammar = &grammar;
    data_->tags_read = testing_ ? ~std::uint64_t{0} : TagsRead(grammar);
    data_->classes = std::make_unique<LetterClasses>(grammar, plan_.visible, plan_.literals);
    if (testing_) {
      for (const Letter& letter : *testing) AddInput(letter, -1);
    } else {
      AddInputs();
    }
  }

  // From here on the inputs are fixed; every rule narrows or extends the alphabet of the next one exactly.
  std::unique_ptr<CascadeData> Run() {
    for (const InputLetter& input : data_->inputs) rests_[input.parts.class_id].insert(input.parts.rest);
    Open(testing_ ? AnyString(InputClasses()) : UnderlyingForms(), /*exact=*/true);
    for (std::size_t i = 0; i < steps_.size(); ++i) {
      if (!AddStep(i)) return nullptr;
    }
    Close();
    if (!testing_) CheckSpelling();
    if (suspicious_ || diagnostics_.HasErrors()) return nullptr;
    return std::move(data_);
  }

  // True if Run gave up at something that is perhaps said of no form of the language.
  bool suspicious() const { return suspicious_; }

 private:
  // ---- inputs -----------------------------------------------------------------------------------
  void AddInput(const Letter& letter, int symbol) {
    InputLetter input;
    input.parts = data_->classes->Classify(letter);
    input.symbol = symbol;
    input.boundary = letter.boundary;
    input.tags = letter.tags;
    input.linked = RootGoesOn(letter, grammar_.tree);
    data_->inputs.push_back(input);
  }

  void AddInputs() {
    std::vector<int> symbols = grammar_.inventory.UnderlyingSymbols();
    for (int symbol : SymbolsInData()) {
      if (std::find(symbols.begin(), symbols.end(), symbol) == symbols.end()) symbols.push_back(symbol);
    }
    for (int symbol : symbols) {
      Letter letter;
      letter.part.daughters.push_back(PartOf(grammar_.inventory.symbols[symbol].underlying));
      AddInput(letter, symbol);
      letter.part.links |= 1u << LinkBit(grammar_.tree, kRootNode);
      AddInput(letter, symbol);
    }
    for (Boundary boundary : {Boundary::kMorpheme, Boundary::kClitic, Boundary::kWord, Boundary::kPhrase}) {
      for (std::uint64_t tags : TagSets()) {
        Letter letter;
        letter.kind = FormItem::Kind::kBoundary;
        letter.boundary = boundary;
        letter.tags = tags;
        AddInput(letter, -1);
      }
    }
  }

  // The sets of tags that a morpheme can have, as far as rules ask: any of a few tags; of many, those that entries of the
  // lexicon have, and each alone. Of the kinds, one.
  std::set<std::uint64_t> TagSets() const {
    if (!grammar_.tagged) return {0};
    constexpr std::uint64_t kKinds = 0xF;
    constexpr std::size_t kMostFree = 6;
    std::vector<std::uint64_t> free;
    for (std::size_t tag = 4; tag < grammar_.tags.size(); ++tag) {
      if (data_->tags_read >> tag & 1) free.push_back(std::uint64_t{1} << tag);
    }
    std::set<std::uint64_t> sets{0};
    if (free.size() <= kMostFree) {
      for (std::uint64_t tag : free) {
        for (std::uint64_t known : std::set<std::uint64_t>(sets)) sets.insert(known | tag);
      }
    } else {
      sets.insert(free.begin(), free.end());
      for (const LexiconEntry& entry : grammar_.lexicon.entries)
        sets.insert(BitsOf(entry.tags) & data_->tags_read & ~kKinds);
    }
    std::set<std::uint64_t> with_kinds;
    for (std::uint64_t set : sets) {
      for (std::uint64_t kind = 1; kind <= kKinds; kind <<= 1) with_kinds.insert(set | (kind & data_->tags_read));
    }
    return with_kinds;
  }

  std::uint64_t BitsOf(const std::vector<std::string>& tags) const {
    std::uint64_t bits = 0;
    for (std::size_t tag = 0; tag < grammar_.tags.size(); ++tag) {
      if (std::find(tags.begin(), tags.end(), grammar_.tags[tag]) != tags.end()) bits |= std::uint64_t{1} << tag;
    }
    return bits;
  }

  std::vector<int> SymbolsInData() const {
    std::vector<int> symbols;
    std::vector<Token> tokens;
    TextError error;
    const auto add = [&symbols](const std::vector<Token>& more) {
      for (const Token& token : more) {
        if (token.kind == Token::Kind::kSymbol) symbols.push_back(token.symbol);
      }
    };
    for (const DataRow& row : grammar_.data) {
      for (const Reading& reading : Readings(row.underlying)) {
        if (Forms().reader().Read(reading.text, Reader::Side::kUnderlying, &tokens, &error)) add(tokens);
      }
    }
    for (const LexiconEntry& entry : grammar_.lexicon.entries) {
      add(entry.form.tokens);
      for (const Suppletion& other : entry.suppletive) add(other.form.tokens);
    }
    std::sort(symbols.begin(), symbols.end());
    symbols.erase(std::unique(symbols.begin(), symbols.end()), symbols.end());
    return symbols;
  }

  const FormReader& Forms() const {
    if (forms_made_ == nullptr) forms_made_ = std::make_unique<FormReader>(grammar_);
    return *forms_made_;
  }

  std::vector<Reading> Readings(const std::string& typed) const {
    std::vector<Reading> readings;
    TextError error;
    if (!Forms().Read(typed, {}, &readings, &error)) readings.clear();
    return readings;
  }

  std::vector<int> InputClasses() const {
    std::vector<int> classes;
    for (const InputLetter& input : data_->inputs) classes.push_back(input.parts.class_id);
    std::sort(classes.begin(), classes.end());
    classes.erase(std::unique(classes.begin(), classes.end()), classes.end());
    return classes;
  }

  static Tape AnyString(const std::vector<int>& classes) {
    Tape tape;
    tape.arcs.resize(1);
    tape.starts = {0};
    tape.ends = {1};
    for (int c : classes) tape.arcs[0].push_back({c, tape.symbols.Intern(Key{0, c, -1}), 0});
    return tape;
  }

  // Words over the input letters in which a long one is the same letter twice: a class of state for each that waits for its second half.
  Tape UnderlyingForms() const {
    std::map<int, std::pair<int, int>> halves;  // class with its root linked -> (class without, state that waits)
    for (std::size_t i = 0; i + 1 < data_->inputs.size(); ++i) {
      if (!data_->inputs[i + 1].linked) continue;
      halves.emplace(data_->inputs[i + 1].parts.class_id,
                     std::make_pair(data_->inputs[i].parts.class_id, static_cast<int>(halves.size()) + 1));
    }
    Tape tape = AnyString({});
    tape.arcs.resize(halves.size() + 1);
    tape.ends.resize(halves.size() + 1, 0);
    if (grammar_.tagged) {  // the ‖ that opens the first morpheme
      tape.starts = {static_cast<int>(tape.arcs.size())};
      tape.arcs.emplace_back();
      tape.ends.push_back(0);
      for (const InputLetter& input : data_->inputs) {
        const int c = input.parts.class_id;
        if (input.boundary == Boundary::kPhrase) tape.arcs.back().push_back({c, tape.symbols.Intern(Key{0, c, -1}), 0});
      }
    }
    const auto add = [&tape](int from, int c, int to) {
      tape.arcs[from].push_back({c, tape.symbols.Intern(Key{0, c, -1}), to});
    };
    for (int c : InputClasses()) {
      const auto half = halves.find(c);
      if (half == halves.end()) {
        add(0, c, 0);
        continue;
      }
      add(0, c, half->second.second);
      add(half->second.second, c, half->second.second);
      add(half->second.second, half->second.first, 0);
    }
    return tape;
  }

  // ---- segments ---------------------------------------------------------------------------------
  void Open(Tape domain, bool exact) {
    current_ = std::move(domain);
    segment_ = Segment{};
    segment_.exact = exact;
    opened_ = std::chrono::steady_clock::now();
  }

  void Close() {
    std::vector<char> seen(data_->classes->size(), 0);
    for (const auto& arcs : current_.arcs) {
      for (const TapeArc& arc : arcs) seen[arc.in] = 1;
    }
    segment_.letters = LettersIn(seen);
    rests_before_ = rests_;
    rests_ = RestsAfter(current_);
    for (int c : ClassesWritten(current_)) seen[c] = 1;
    segment_.classes = static_cast<std::size_t>(std::count(seen.begin(), seen.end(), 1));
    segment_.machine = std::move(current_);
    segment_.seconds = Seconds(opened_);
    data_->segments.push_back(std::move(segment_));
  }

  // Which rests may ride with a class after a machine, letter by letter.
  std::map<int, std::set<int>> RestsAfter(const Tape& machine) const {
    std::map<int, std::set<int>> after;
    for (const auto& arcs : machine.arcs) {
      for (const TapeArc& arc : arcs) {
        const Key& string = machine.symbols[arc.out];
        for (std::size_t k = 1; k + 1 < string.size(); k += 2) {
          if (string[k + 1] >= 0) {
            after[string[k]].insert(string[k + 1]);
          } else {
            const auto found = rests_.find(arc.in);
            if (found != rests_.end()) after[string[k]].insert(found->second.begin(), found->second.end());
          }
        }
      }
    }
    return after;
  }

  std::size_t LettersIn(const std::vector<char>& classes) const {
    std::size_t letters = 0;
    for (const InputLetter& input : data_->inputs) letters += classes[input.parts.class_id] ? 1 : 0;
    return letters;
  }

  bool AddStep(std::size_t index) {
    const Rule& rule = steps_[index];
    const std::vector<int> classes_in = ClassesWritten(current_);
    const std::vector<NodeId> live = LinksIn(classes_in, rule, plan_.live[index]);
    RuleMachine machine = CompileRule(rule, *data_->classes, classes_in, live, plan_.live[index + 1], limits_);
    if (machine.over_budget) {
      diagnostics_.Error(
          Kind::kLimit, rule.span,
          fmt::format("rule \"{}\" needs more than {} states to find its matches, or {} to carry them out", rule.name,
                      limits_.side_states, limits_.step_states),
          Costs(rule));
      return false;
    }
    const Tape reduced = Reduce(std::move(machine.tape));
    // Rules that have little to do with each other multiply their states: then two machines in a row are the smaller.
    const bool alone = index == opened_at_;
    const std::size_t most_states = alone ? limits_.states : std::min(limits_.states, limits_.joined_states);
    const std::size_t most_arcs = alone ? limits_.arcs : std::min(limits_.arcs, limits_.joined_arcs);
    bool over = false;
    const Tape flagged = Compose(current_, reduced, most_states, most_arcs, &over);
    Tape composed;
    if (!over) {
      composed = Reduce(MapSymbols(flagged, WithoutFlags(testing_ ? ~kFlagChanged : 0)));
      over = composed.arcs.size() > most_states || composed.ArcCount() > most_arcs;
      if (!over && !CheckRule(rule, flagged)) return false;
    }
    if (over) {
      if (alone) {
        diagnostics_.Error(Kind::kLimit, rule.span,
                           fmt::format("rule \"{}\" alone makes a machine of more than {} states or {} arcs", rule.name,
                                       limits_.states, limits_.arcs),
                           Costs(rule));
        return false;
      }
      // What comes out so far is what goes into the next segment; followed exactly if its acceptor is small enough.
      Tape outputs;
      if (past_cuts_ == PastCuts::kExactly && segment_.exact) outputs = OutputsOf(current_, limits_.states);
      const bool exact = !outputs.starts.empty();
      if (!exact) outputs = AnyString(ClassesWritten(current_));
      Close();
      Open(std::move(outputs), exact);
      opened_at_ = index;
      return AddStep(index);
    }
    current_ = std::move(composed);
    if (index >= grammar_.fusions.size()) segment_.rules.push_back(static_cast<int>(index - grammar_.fusions.size()));
    return true;
  }

  // Of the nodes whose links may matter: those of which some letter that comes in has a link, or the rule draws one, and
  // what is above them. The others have no links at all, so nothing needs to watch them.
  std::vector<NodeId> LinksIn(const std::vector<int>& classes, const Rule& rule,
                              const std::vector<NodeId>& planned) const {
    NodeSet linked(grammar_.tree.nodes.size(), false);
    linked[kRootNode] = true;
    const auto note = [&](const auto& self, const LetterPart& part) -> void {
      const std::vector<NodeId>& kinds = grammar_.tree[part.node].daughters;
      for (std::size_t i = 0; i < kinds.size(); ++i) {
        if (part.links >> i & 1u) linked[kinds[i]] = true;
      }
      for (const LetterPart& daughter : part.daughters) self(self, daughter);
    };
    for (int c : classes) note(note, (*data_->classes)[c].visible.part);
    for (const Clause* clause : ClausesOf(rule)) {
      for (const Change& change : clause->changes) {
        if (change.op == Change::Op::kSpread || change.op == Change::Op::kMerge) linked[change.node] = true;
      }
    }
    for (NodeId node = static_cast<NodeId>(linked.size()); node-- > kRootNode;) {  // mothers have smaller numbers
      if (linked[node]) linked[grammar_.tree[node].mother] = true;
    }
    std::vector<NodeId> live;
    for (NodeId node : planned) {
      if (linked[node]) live.push_back(node);
    }
    return live;
  }

  static std::function<Key(const Key&)> WithoutFlags(std::int32_t kept) {
    return [kept](const Key& symbol) {
      Key plain = symbol;
      plain[0] &= kept;
      return plain;
    };
  }

  static std::string Costs(const Rule& rule) {
    std::size_t spreads = 0;
    for (const Change& change : rule.changes) spreads += change.op == Change::Op::kSpread;
    if (spreads > 2) return "split its spreads over several rules, or narrow its pattern";
    return "narrow its pattern: fewer optional items, a shorter window between the items it compares";
  }

  // ---- what a rule may not do --------------------------------------------------------------------
  bool CheckRule(const Rule& rule, const Tape& composed) {
    if (testing_) return true;
    const auto flagged = [&composed](std::int32_t flag) {
      return [&composed, flag](const TapeArc& arc) { return (composed.symbols[arc.out][0] & flag) != 0; };
    };
    if (past_cuts_ == PastCuts::kAnyString && !segment_.exact) {
      for (const auto& arcs : composed.arcs)
        suspicious_ =
            suspicious_ || std::any_of(arcs.begin(), arcs.end(), flagged(kFlagAmbiguous | kFlagReaches | kFlagUnsure));
      if (suspicious_) return false;
    }
    std::size_t at = 0;
    const Severity severity = segment_.exact ? Severity::kError : Severity::kWarning;
    const std::string possibly = segment_.exact ? "" : "possibly reached: ";
    const std::vector<TapeArc> ambiguous = ShortestThrough(composed, flagged(kFlagAmbiguous), &at);
    if (!ambiguous.empty()) {
      const std::string form = FormInOpenSegment(ambiguous);
      diagnostics_.Add(
          {Kind::kAmbiguousRule,
           severity,
           rule.span,
           fmt::format("{}rule \"{}\" is ambiguous: in /{}/ two of its matches ask for different things{}", possibly,
                       rule.name, form, Explained(rule, form)),
           rule.prefer == Rule::Prefer::kNone
               ? "narrow the pattern so that only one of them matches, say which to `prefer`, or let the "
                 "rule `iterate`"
               : "`prefer` decides between matches that meet at one slot; these meet at a node that several "
                 "slots share: narrow the pattern",
           {}});
      if (segment_.exact) return false;
    }
    const std::vector<TapeArc> reaches = ShortestThrough(composed, flagged(kFlagReaches), &at);
    if (!reaches.empty()) {
      diagnostics_.Add(
          {Kind::kReachesOtherRoot,
           severity,
           rule.span,
           fmt::format(
               "{}rule \"{}\" iterates, but in /{}/ its change would reach another segment through a shared node",
               possibly, rule.name, FormInOpenSegment(reaches)),
           "spread or set the lower feature instead of what is shared, delink it first in a rule of its own, or apply "
           "the "
           "rule at once (without `iterate`)",
           {}});
      if (segment_.exact) return false;
    }
    const std::vector<TapeArc> unsure = ShortestThrough(composed, flagged(kFlagUnsure), &at);
    if (!unsure.empty()) {
      diagnostics_.Add(
          {Kind::kLimit,
           severity,
           rule.span,
           rule.mode == Rule::Mode::kAtOnce
               ? fmt::format(
                     "{}rule \"{}\" in /{}/ changes a node that several segments share, and what becomes of the "
                     "others would have to be judged as well: this cannot be compiled",
                     possibly, rule.name, FormInOpenSegment(unsure))
               : fmt::format(
                     "{}rule \"{}\" iterates, and in /{}/ its change decides about a segment that the sweep has "
                     "passed, or replaces half of a long one: this cannot be compiled",
                     possibly, rule.name, FormInOpenSegment(unsure)),
           rule.mode == Rule::Mode::kAtOnce
               ? "delink or spread what is shared in a rule of its own before this one"
               : "apply the rule at once (without `iterate`), or cut the line in a rule of its own",
           {}});
      if (segment_.exact) return false;
    }
    if (rule.kind == Rule::Kind::kComplete) return true;  // it need not find anything
    const bool applies = !ShortestThrough(composed, flagged(kFlagChanged), &at).empty();
    if (!applies) {
      diagnostics_.Warning(
          Kind::kNeverApplies, rule.span,
          fmt::format("rule \"{}\" never changes anything: no form that reaches it fits its pattern", rule.name),
          "check its features against the inventory, and the rules before it");
    }
    return true;
  }

  std::string Explained(const Rule& rule, const std::string& form) const {
    const std::optional<Form> before = Before(rule, form);
    if (!before.has_value()) return "";
    const Application application = ApplyRule(grammar_, rule, *before);
    return application.ambiguous.empty() ? "" : fmt::format(" ({})", application.ambiguous);
  }

  // The form as it is when it comes to a rule.
  std::optional<Form> Before(const Rule& rule, const std::string& text) const {
    const std::vector<Reading> readings = Readings(text);
    if (readings.empty()) return std::nullopt;
    Form form = Forms().FormOf(readings.front());
    for (const Rule& earlier : steps_) {
      if (&earlier == &rule) break;
      form = ApplyRule(grammar_, earlier, form).form;
    }
    return form;
  }

  // ---- spelling ---------------------------------------------------------------------------------
  struct Unspelled {
    std::string form;
    FeatureTree tree;
  };

  // Every letter that can come out must have a symbol.
  void CheckSpelling() {
    const Segment& last = data_->segments.back();
    // Trees without a symbol, each with the arc and the rest that make it.
    std::vector<std::pair<FeatureTree, std::pair<TapeArc, int>>> found;
    for (const auto& arcs : last.machine.arcs) {
      for (const TapeArc& arc : arcs) {
        const Key& written = last.machine.symbols[arc.out];
        for (std::size_t k = 1; k + 1 < written.size(); k += 2) {
          if (written[k + 1] >= 0) {
            Note(written[k], written[k + 1], arc, written[k + 1], &found);
            continue;
          }
          for (int rest : rests_before_[arc.in]) Note(written[k], rest, arc, rest, &found);
        }
      }
    }
    suspicious_ = !found.empty() && past_cuts_ == PastCuts::kAnyString && !last.exact;
    if (suspicious_) return;
    // No more than a few: one mistake often makes many trees.
    constexpr std::size_t kMost = 3;
    for (std::size_t i = 0; i < found.size() && i < kMost; ++i)
      Report(found[i].first, found[i].second.first, found[i].second.second);
  }

  void Note(int class_id, int rest, const TapeArc& arc, int arc_rest,
            std::vector<std::pair<FeatureTree, std::pair<TapeArc, int>>>* found) {
    const auto [it, added] = spelled_.emplace(std::make_pair(class_id, rest), true);
    if (!added) return;
    const std::optional<FeatureTree> root = RootContent(data_->classes->Join(class_id, rest));
    if (!root.has_value()) return;
    if (grammar_.inventory.Spell(*root).symbol >= 0) return;
    for (const auto& known : *found) {
      if (known.first == *root) return;
    }
    found->emplace_back(*root, std::make_pair(arc, arc_rest));
  }

  void Report(const FeatureTree& tree, const TapeArc& wanted, int rest) {
    const Segment& last = data_->segments.back();
    std::size_t at = 0;
    const std::vector<TapeArc> path = ShortestThrough(
        last.machine, [&](const TapeArc& arc) { return arc.in == wanted.in && arc.out == wanted.out; }, &at);
    const std::string form = FormText(path, data_->segments.size() - 1, static_cast<int>(at), rest);
    const std::vector<int>& candidates = grammar_.inventory.Spell(tree).candidates;
    std::string message = candidates.empty()
                              ? fmt::format("no symbol spells {}", grammar_.inventory.Describe(tree, grammar_.tree))
                              : fmt::format("two or more symbols could spell {}", Bracketed(tree));
    const bool whole = data_->segments.back().exact;  // else the path begins in the middle
    message += whole ? fmt::format(", which /{}/ comes to", form) : ", which some form may come to";
    Span span = grammar_.rules.empty() ? Span{} : grammar_.rules.back().span;
    const int rule = whole ? LastRuleThatChanged(form, tree) : -1;
    if (rule >= 0) {
      span = grammar_.rules[rule].span;
      message += fmt::format(" (rule \"{}\" changed it last)", grammar_.rules[rule].name);
    } else if (whole) {
      message += " (no rule changed it: it is an underlying tree that nothing completes)";
      for (const Symbol& symbol : grammar_.inventory.symbols) {
        if (symbol.underlying == tree) span = symbol.span;
      }
    }
    std::string remedy;
    if (!candidates.empty()) {
      remedy = "candidates:";
      for (int candidate : candidates) remedy += " " + grammar_.inventory.symbols[candidate].text;
      remedy += "; tell them apart with a rule that fills the missing value, or take one out of `omit`";
    } else {
      remedy = fmt::format(
          "declare it (allophones {{ x = {} }}, with its own sign for x), let `omit` restore what is missing, or add a "
          "rule that sets or fills it",
          grammar_.inventory.Declaration(tree, grammar_.tree));
    }
    diagnostics_.Add({Kind::kNoSymbol,
                      grammar_.strict || DataReach(tree) ? Severity::kError : Severity::kWarning,
                      span,
                      message,
                      remedy,
                      {}});
  }

  std::string Bracketed(const FeatureTree& tree) const {
    std::string text;
    const auto walk = [&](const auto& self, const FeatureTree& at) -> void {
      for (const FeatureTree& daughter : at.daughters) {
        if (!text.empty()) text += ' ';
        text += grammar_.tree.ValueName(daughter.node, daughter.value);
        self(self, daughter);
      }
    };
    walk(walk, tree);
    return "[" + text + "]";
  }

  // Of the ways that optional rules leave open, the first that comes to this tree.
  int LastRuleThatChanged(const std::string& text, const FeatureTree& tree) const {
    const std::vector<Reading> readings = Readings(text);
    if (readings.empty()) return -1;
    std::vector<std::pair<Form, int>> ways{
        {Fused(grammar_, Forms().FormOf(readings.front())), -1}};  // with the last rule so far
    for (std::size_t r = 0; r < grammar_.rules.size(); ++r) {
      std::vector<std::pair<Form, int>> next;
      for (const auto& [form, last] : ways) {
        for (Outcome& outcome : ApplyRule(grammar_, grammar_.rules[r], form).outcomes) {
          const bool changed = !(Canonical(outcome.form) == Canonical(form));
          next.emplace_back(std::move(outcome.form), changed ? static_cast<int>(r) : last);
        }
      }
      ways = std::move(next);
    }
    for (const auto& [form, last] : ways) {
      const std::vector<FeatureTree> roots = RootsOf(form);
      if (std::find(roots.begin(), roots.end(), tree) != roots.end()) return last;
    }
    return -1;
  }

  // Do the data reach this tree (or are there none to ask)?
  bool DataReach(const FeatureTree& tree) {
    if (grammar_.data.empty()) return true;
    if (!data_surfaces_done_) {
      data_surfaces_done_ = true;
      for (const DataRow& row : grammar_.data) {
        for (const Reading& reading : Readings(row.underlying)) {
          for (const Outcome& outcome : Derive(grammar_, Forms().FormOf(reading)).outcomes) {
            const std::vector<FeatureTree> roots = RootsOf(outcome.form);
            data_roots_.insert(data_roots_.end(), roots.begin(), roots.end());
          }
        }
      }
    }
    return std::find(data_roots_.begin(), data_roots_.end(), tree) != data_roots_.end();
  }

  static std::vector<FeatureTree> RootsOf(const Form& form) {
    std::vector<FeatureTree> roots;
    for (const FormItem& item : form.items) {
      if (item.kind != FormItem::Kind::kSlot || RootOf(form, item) < 0) continue;
      roots.push_back(ContentOf(form, static_cast<InstanceId>(RootOf(form, item))));
    }
    return roots;
  }

  std::string FormInOpenSegment(const std::vector<TapeArc>& path) const {
    return FormText(path, data_->segments.size());
  }

  // An underlying form that goes this path through the segment number `segment`, written with the first symbols that fit; at
  // position `at` of the path, one with the given rest.
  std::string FormText(std::vector<TapeArc> path, std::size_t segment, int at = -1, int rest = -1) const {
    while (segment > 0) {
      const Tape& machine = data_->segments[--segment].machine;
      std::vector<int> classes;
      for (const TapeArc& arc : path) classes.push_back(arc.in);
      std::vector<std::size_t> written_by;
      std::vector<TapeArc> before = ShortestWriting(machine, classes, &written_by);
      if (before.empty()) break;  // what comes in is not followed exactly
      if (at >= 0) {
        const std::size_t arc = written_by[static_cast<std::size_t>(at)];
        const auto first = std::find(written_by.begin(), written_by.end(), arc) - written_by.begin();
        const bool of_the_letter = machine.symbols[before[arc].out][2 + 2 * static_cast<std::size_t>(at - first)] < 0;
        at = of_the_letter ? static_cast<int>(arc) : -1;
      }
      path = std::move(before);
    }
    std::vector<const InputLetter*> letters;
    for (std::size_t i = 0; i < path.size(); ++i) {
      const InputLetter* before = letters.empty() ? nullptr : letters.back();
      const InputLetter* chosen = nullptr;  // past an inexact cut the letters are not underlying ones
      for (const InputLetter& input : data_->inputs) {
        if (input.parts.class_id != path[i].in) continue;
        if (static_cast<int>(i) == at && input.parts.rest != rest) continue;
        if (before != nullptr && before->linked && input.symbol != before->symbol) continue;
        chosen = &input;
        break;
      }
      letters.push_back(chosen);
    }
    return WriteInputs(grammar_, letters);
  }

  const Grammar& grammar_;
  const std::vector<Rule> steps_;
  const Limits& limits_;
  Diagnostics& diagnostics_;
  bool testing_;
  PastCuts past_cuts_;
  bool suspicious_ = false;
  Plan plan_;
  mutable std::unique_ptr<FormReader> forms_made_;  // when the first text comes
  std::unique_ptr<CascadeData> data_;
  Tape current_;
  Segment segment_;
  std::chrono::steady_clock::time_point opened_;
  std::size_t opened_at_ = 0;  // the first step of the segment
  std::map<std::pair<int, int>, bool> spelled_;
  std::vector<FeatureTree> data_roots_;
  bool data_surfaces_done_ = false;
  std::map<int, std::set<int>> rests_, rests_before_;  // by class: after, and before, the last closed segment
};

std::unique_ptr<Cascade> CompileWith(const Grammar& grammar, const Limits& limits, Diagnostics& diagnostics,
                                     const std::vector<Letter>* testing) {
  using PastCuts = CascadeCompiler::PastCuts;
  std::unique_ptr<CascadeData> data;
  for (const PastCuts past_cuts : {PastCuts::kAnyString, PastCuts::kExactly}) {
    Diagnostics found;
    CascadeCompiler compiler(grammar, limits, found, testing, past_cuts);
    data = compiler.Run();
    if (compiler.suspicious()) continue;
    for (const Diagnostic& diagnostic : found.all()) diagnostics.Add(diagnostic);
    break;
  }
  return data == nullptr ? nullptr : std::make_unique<Cascade>(std::move(data));
}

}  // namespace

std::vector<Letter> LettersOf(const Form& form, const CascadeData& data) {
  std::vector<Letter> letters = Encode(form, data.grammar->tree);
  for (Letter& letter : letters) letter.tags &= data.tags_read;
  return letters;
}

std::string WriteInputs(const Grammar& grammar, const std::vector<const InputLetter*>& letters) {
  std::string text, tags;  // the tags of a morpheme are written behind it
  bool linked = false;
  for (const InputLetter* letter : letters) {
    if (letter == nullptr) {
      text += "?";
    } else if (letter->symbol < 0) {
      text += tags;
      tags.clear();
      for (std::size_t tag = 0; tag < grammar.tags.size(); ++tag) {
        if (letter->tags >> tag & 1) tags += "@" + grammar.tags[tag];
      }
      if (!grammar.tagged || letter != letters.front()) text += BoundarySign(letter->boundary);
    } else {
      text += linked && !grammar.Doubles(letter->symbol) ? "ː" : grammar.inventory.symbols[letter->symbol].text;
    }
    linked = letter != nullptr && letter->linked;
  }
  return text + tags;
}

Cascade::Cascade(std::unique_ptr<CascadeData> data) : data_(std::move(data)) {}
Cascade::~Cascade() = default;
Cascade::Cascade(Cascade&&) noexcept = default;

std::vector<SegmentStats> Cascade::Stats() const {
  std::vector<SegmentStats> all;
  for (const Segment& segment : data_->segments) {
    SegmentStats stats;
    for (int rule : segment.rules) stats.rules.push_back(data_->grammar->rules[rule].name);
    stats.states = segment.machine.arcs.size();
    stats.arcs = segment.machine.ArcCount();
    stats.classes = segment.classes;
    stats.letters = segment.letters;
    stats.bytes = BytesOf(segment.machine);
    stats.seconds = segment.seconds;
    all.push_back(std::move(stats));
  }
  return all;
}

std::unique_ptr<Cascade> Compile(const Grammar& grammar, const Limits& limits, Diagnostics& diagnostics) {
  return CompileWith(grammar, limits, diagnostics, nullptr);
}

std::unique_ptr<Cascade> CompileForTesting(const Grammar& grammar, const std::vector<Letter>& letters,
                                           const Limits& limits, Diagnostics& diagnostics) {
  return CompileWith(grammar, limits, diagnostics, &letters);
}

}  // namespace tiersmith
