// Segments, archisegments, allophones, diacritics and omit -> the inventory.
//
// Example: `segments from "ipa" { t i }  archisegments { I = i [no back] }  omit { -voice in [-son] }` gives
// t and i with the library's features that the tree has, I as i without back, and t underlying without its
// Laryngeal node. Order: listed symbols, `without`, diacritics and the symbols made with them, omit, then
// what falls together. Does not handle: marks of slot-borne nodes, floats (errors say so). Tested by
// tests/unit/model/inventory_test.cc.
#include <algorithm>
#include <unordered_map>

#include "base/utf8.h"
#include "model/check.h"
#include "model/content.h"
#include "model/normal_text.h"

namespace tiersmith {
namespace {

constexpr char32_t kCircle = U'\u25CC';
constexpr std::size_t kMostComposites = 100'000;  // beyond it only single diacritics are enumerated

const char* KindName(Symbol::Kind kind) {
  switch (kind) {
    case Symbol::Kind::kSegment:
      return "segments";
    case Symbol::Kind::kArchisegment:
      return "archisegments";
    case Symbol::Kind::kAllophone:
      return "allophones";
    case Symbol::Kind::kComposite:
      return "diacritics";
  }
  return "";
}

Symbol::Kind KindOf(const syntax::Segments& block) {
  switch (block.kind) {
    case syntax::Segments::Kind::kSegments:
      return Symbol::Kind::kSegment;
    case syntax::Segments::Kind::kArchisegments:
      return Symbol::Kind::kArchisegment;
    case syntax::Segments::Kind::kAllophones:
      return Symbol::Kind::kAllophone;
  }
  return Symbol::Kind::kSegment;
}

// The first code point that no symbol may hold, or 0.
char32_t BadIn(std::u32string_view symbol) {
  for (const char32_t code : symbol) {
    if (std::u32string_view(U" \t-=#.\u2016|@{}[]/\u27E8\u27E9\";\u02D0").find(code) != std::u32string_view::npos)
      return code;
  }
  return 0;
}

}  // namespace

// ---- listed symbols ---------------------------------------------------------------------------------

std::vector<std::string> Checker::SymbolNames() const {
  std::vector<std::string> names;
  for (const Symbol& symbol : grammar_.inventory.symbols) names.push_back(symbol.text);
  return names;
}

void Checker::AddSymbolText(int symbol) {
  trie_.Add(grammar_.inventory.symbols[static_cast<std::size_t>(symbol)].text, symbol);
}

void Checker::RebuildTrie() {
  trie_ = SymbolTrie();
  for (std::size_t i = 0; i < grammar_.inventory.symbols.size(); ++i) AddSymbolText(static_cast<int>(i));
}

void Checker::CollectEntries() {
  bool any = false;
  for (const syntax::Top& top : file_.tops) {
    const auto* block = std::get_if<syntax::Segments>(&top);
    if (block == nullptr) continue;
    any = any || !block->entries.empty();
    for (const syntax::SegmentEntry& entry : block->entries) AddEntry(entry, *block);
  }
  if (any) return;
  for (const Diagnostic& diagnostic : diagnostics_.all()) {
    if (diagnostic.kind == Kind::kBadTree && diagnostic.span.begin == whole_.begin && diagnostic.span.end == whole_.end)
      return;
  }
  Error(Kind::kUnknownSymbol, whole_, "the grammar lists no segments",
        "list them: `segments from \"ipa\" { p t k i u a }`");
}

void Checker::AddEntry(const syntax::SegmentEntry& written, const syntax::Segments& block) {
  Inventory& inventory = grammar_.inventory;
  const std::u32string normal = Normalise(written.symbol.text);
  if (normal.empty() || BadIn(normal) != 0) {
    const std::string which = normal.empty() ? "an empty name" : "'" + ToUtf8(std::u32string(1, BadIn(normal))) + "'";
    Error(Kind::kBadForm, written.symbol.span,
          "'" + written.symbol.text + "' cannot be a symbol: " + which + " is no part of one",
          "length, boundaries and brackets have meanings of their own in forms; choose another sign");
    return;
  }
  const std::string text = SymbolKey(written.symbol.text);
  Entry entry;
  entry.entry = &written;
  entry.block = &block;
  const Symbol::Kind kind = KindOf(block);
  const auto found = inventory.by_text.find(SymbolSetKey(text));
  if (found == inventory.by_text.end()) {
    const int id = static_cast<int>(inventory.symbols.size());
    Symbol symbol;
    symbol.text = text;
    symbol.kind = kind;
    symbol.in_underlying = kind != Symbol::Kind::kAllophone;
    symbol.completes = kind != Symbol::Kind::kArchisegment;
    symbol.span = written.symbol.span;
    inventory.symbols.push_back(symbol);
    inventory.by_text[SymbolSetKey(text)] = id;
    entries_.push_back(entry);
    return;
  }
  Entry& old = entries_[static_cast<std::size_t>(found->second)];
  Symbol& symbol = inventory.symbols[static_cast<std::size_t>(found->second)];
  const auto twice = [&](Severity severity, const std::string& message, const std::string& remedy) {
    diagnostics_.Add(
        {Kind::kDuplicate, severity, written.symbol.span, message, remedy, {{symbol.span, "first listed here"}}});
  };
  if (symbol.kind != kind) {
    twice(Severity::kError, "'" + text + "' is listed in " + KindName(symbol.kind) + " and in " + KindName(kind),
          "keep one of the two");
  } else if (IsFull(old) && IsFull(entry)) {
    twice(Severity::kError, "'" + text + "' is defined twice", "keep one of the two");
  } else if (!IsFull(old) && !IsFull(entry)) {
    twice(Severity::kWarning, "'" + text + "' is listed twice", "take one of the two away");
  } else if (IsFull(entry)) {
    old = entry;  // an entry with a bundle replaces a bare listing
    symbol.span = written.symbol.span;
  }
}

Library* Checker::LibraryOf(const syntax::Name* name, Span span) {
  const std::string which = name != nullptr ? name->text : "ipa";
  if (failed_libraries_.count(which) != 0) return nullptr;
  const auto [place, fresh] = libraries_.emplace(which, Library());
  if (fresh && !place->second.Load(which, name != nullptr ? name->span : span, *grammar_.sources, diagnostics_)) {
    libraries_.erase(place);
    failed_libraries_.insert(which);
    return nullptr;
  }
  return &place->second;
}

const FeatureTree* Checker::FromLibrary(const syntax::Name& symbol, const syntax::Segments& block,
                                        FeatureTree* content) {
  Library* library = LibraryOf(block.from ? &*block.from : nullptr, symbol.span);
  if (library == nullptr) return nullptr;
  const Library::Segment* segment = library->Find(symbol.text);
  if (segment == nullptr) {
    std::vector<std::string> known = library->Symbols();
    const std::vector<std::string> listed = SymbolNames();
    known.insert(known.end(), listed.begin(), listed.end());
    Error(Kind::kUnknownSymbol, symbol.span,
          "the library \"" + (block.from ? block.from->text : "ipa") + "\" has no '" + symbol.text + "'",
          Or(DidYouMean(symbol.text, known),
             "say what it is: `" + symbol.text + " = y [..]`, where y is a symbol that is known"));
    return nullptr;
  }
  from_library_ = true;
  std::vector<std::string> cut;
  *content = library->ContentOf(*segment, grammar_.tree, &cut);
  for (const std::string& name : cut) {
    diagnostics_.Warning(Kind::kBadValue, symbol.span,
                         "'" + segment->symbol + "' has two values of '" + name +
                             "' in a row, for which this tree has no room: only the first is kept",
                         "write `×2` after " + name + " in `tree`");
  }
  return content;
}

void Checker::Apply(const std::vector<Setting>& settings, FeatureTree* root) {
  for (const Setting& setting : settings) {
    if (setting.values.empty()) Remove(root, setting.node);
  }
  for (const Setting& setting : settings) {
    if (!setting.values.empty()) SetValues(grammar_.tree, root, setting.node, setting.values);
  }
  Prune(grammar_.tree, root);
}

bool Checker::HasRoom(const FeatureTree& root, NodeId* full) const { return HasRoomUnder(root, root, full); }

bool Checker::HasRoomUnder(const FeatureTree& content, const FeatureTree& root, NodeId* full) const {
  for (std::size_t i = 0; i < content.daughters.size(); ++i) {
    const FeatureTree& daughter = content.daughters[i];
    const TreeNode& kind = grammar_.tree[daughter.node];
    const bool second = i > 0 && content.daughters[i - 1].node == daughter.node;
    if (second && (kind.max < 2 || (kind.room && !Passes(*kind.room, root, [](int) { return false; })))) {
      *full = daughter.node;
      return false;
    }
    if (!HasRoomUnder(daughter, root, full)) return false;
  }
  return true;
}

bool Checker::Build(std::size_t id) {
  Entry& entry = entries_[id];
  const syntax::SegmentEntry& written = *entry.entry;
  switch (entry.state) {
    case Entry::State::kDone:
      return true;
    case Entry::State::kFailed:
      return false;
    case Entry::State::kBusy:
      Error(Kind::kUnknownSymbol, written.symbol.span, "'" + written.symbol.text + "' is told by way of itself",
            "make one symbol of this ring like one of the library's");
      return false;
    case Entry::State::kNew:
      break;
  }
  entry.state = Entry::State::kBusy;
  FeatureTree content{kRootNode, 0, {}};
  bool good = true;
  const std::string text = grammar_.inventory.symbols[id].text;
  if (written.like && SymbolSetKey(written.like->text) != SymbolSetKey(text)) {
    const auto listed = grammar_.inventory.by_text.find(SymbolSetKey(written.like->text));
    if (listed != grammar_.inventory.by_text.end()) {
      good = Build(static_cast<std::size_t>(listed->second));
      if (good) content = entries_[static_cast<std::size_t>(listed->second)].raw;
    } else {
      good = FromLibrary(*written.like, *entry.block, &content) != nullptr;
    }
  } else if (written.like || !written.bundle || entry.block->from) {
    good = FromLibrary(written.like ? *written.like : written.symbol, *entry.block, &content) != nullptr;
  }
  for (const std::optional<syntax::Bundle>* bundle : {&entry.block->added, &written.bundle}) {
    if (!*bundle) continue;
    std::vector<Setting> settings;
    if (!ResolveSettings(**bundle, nullptr, &settings)) {
      good = false;
      continue;
    }
    for (const Setting& setting : settings) given_.insert(setting.node);
    Apply(settings, &content);
    NodeId full = 0;
    if (good && !HasRoom(content, &full)) {
      Error(Kind::kBadValue, (*bundle)->span,
            "'" + written.symbol.text + "' has no room for two of '" + grammar_.tree[full].name + "'",
            "give the values one by one, or widen `in [..]` after " + grammar_.tree[full].name + " in `tree`");
      good = false;
    }
  }
  entry.raw = std::move(content);
  entry.state = good ? Entry::State::kDone : Entry::State::kFailed;
  return good;
}

void Checker::BuildTrees() {
  for (std::size_t id = 0; id < entries_.size(); ++id) {
    Build(id);
    Symbol& symbol = grammar_.inventory.symbols[id];
    symbol.full = entries_[id].raw;
    symbol.full.node = kRootNode;
  }
}

// ---- without ----------------------------------------------------------------------------------------

bool Checker::SymbolPasses(const SlotTest& test, int symbol) const {
  const Inventory& inventory = grammar_.inventory;
  return Passes(test, inventory.symbols[static_cast<std::size_t>(symbol)].full,
                [&](int literal) { return inventory.literals[static_cast<std::size_t>(literal)].symbol == symbol; });
}

std::vector<std::pair<NodeId, Value>> Checker::ResolveValues(const syntax::ValueRef& ref, Span span, const char* verb) {
  const Span place = ref.name.span.end > ref.name.span.begin ? ref.name.span : span;
  const std::optional<NodeId> node = NodeOf(syntax::Name{ref.name.text, place}, Kind::kUnknownFeature);
  if (!node) return {};
  const TreeNode& kind = grammar_.tree[*node];
  switch (kind.type) {
    case TreeNode::Type::kClass:
      Error(Kind::kBadValue, place, std::string("`") + verb + "` takes values, and '" + kind.name + "' is a class node",
            "list the features under it");
      return {};
    case TreeNode::Type::kBinary:
      switch (ref.kind) {
        case syntax::ValueRef::Kind::kBoth:
          return {{*node, 0}, {*node, 1}};
        case syntax::ValueRef::Kind::kPlus:
          return {{*node, 1}};
        case syntax::ValueRef::Kind::kMinus:
          return {{*node, 0}};
        case syntax::ValueRef::Kind::kBare:
          break;
      }
      Error(Kind::kBadValue, place, "'" + kind.name + "' needs a sign here",
            "write ±" + kind.name + " for both values, or +" + kind.name + " or -" + kind.name);
      return {};
    case TreeNode::Type::kBare:
    case TreeNode::Type::kMany: {
      if (ref.kind != syntax::ValueRef::Kind::kBare) {
        Error(Kind::kBadValue, place, "'" + kind.name + "' takes no sign", "write `" + kind.name + "`");
        return {};
      }
      std::vector<std::pair<NodeId, Value>> all;
      const std::size_t n = kind.type == TreeNode::Type::kMany ? kind.values.size() : 1;
      for (std::size_t value = 0; value < n; ++value) all.emplace_back(*node, static_cast<Value>(value));
      return all;
    }
  }
  return {};
}

// For all symbols of the grammar, and for good. Every `in` is asked of the trees before any line has taken
// its part.
void Checker::TakeWithout() {
  for (const syntax::Top& top : file_.tops) {
    const auto* block = std::get_if<syntax::Segments>(&top);
    if (block == nullptr) continue;
    for (const syntax::ValuesIn& line : block->without) {
      std::optional<SlotTest> test = line.in ? ResolveSymbolSet(*line.in) : SlotTest{};
      for (const syntax::ValueRef& ref : line.values) {
        for (const auto& value : ResolveValues(ref, line.span, "without")) {
          given_.insert(value.first);
          if (test) without_.emplace_back(value, *test);
        }
      }
    }
  }
  Inventory& inventory = grammar_.inventory;
  for (std::size_t id = 0; id < inventory.symbols.size(); ++id) {
    FeatureTree reduced = inventory.symbols[id].full;
    for (const auto& [value, test] : without_) {
      if (BearsValue(reduced, value.first, value.second) && SymbolPasses(test, static_cast<int>(id)))
        Remove(&reduced, value.first);
    }
    Prune(grammar_.tree, &reduced);
    inventory.symbols[id].full = std::move(reduced);
  }
}

// ---- diacritics -------------------------------------------------------------------------------------

void Checker::CheckDiacritics() {
  Inventory& inventory = grammar_.inventory;
  std::map<std::string, Span> seen;
  for (const syntax::Top& top : file_.tops) {
    const auto* block = std::get_if<syntax::Diacritics>(&top);
    if (block == nullptr) continue;
    for (const syntax::Diacritic& written : block->entries) {
      std::u32string text = Normalise(written.symbol.text);
      const std::size_t circle = text.find(kCircle);
      if (circle == std::u32string::npos) {
        Error(Kind::kNotSupportedYet, written.symbol.span,
              "'" + written.symbol.text + "' has no ◌: signs of floating instances are not supported by this release",
              "write ◌ where the base letter stands: ◌" + written.symbol.text);
        continue;
      }
      text.erase(circle, 1);
      const bool inside = circle > 0 && circle < text.size();
      if (text.empty() || inside || BadIn(text) != 0) {
        Error(Kind::kBadForm, written.symbol.span, "'" + written.symbol.text + "' cannot be a diacritic",
              "write one sign before or after ◌; length, boundaries and brackets have meanings of their own");
        continue;
      }
      const std::string key = SymbolKey(written.symbol.text);
      const auto [place, fresh] = seen.emplace(key, written.symbol.span);
      if (!fresh) {
        diagnostics_.Add({Kind::kDuplicate,
                          Severity::kError,
                          written.symbol.span,
                          "'" + key + "' is declared twice",
                          "keep one of the two",
                          {{place->second, "first declared here"}}});
        continue;
      }
      Sign sign;
      sign.usable = ResolveSettings(written.bundle, nullptr, &sign.settings);
      if (sign.usable && sign.settings.empty()) {
        Error(Kind::kBadValue, written.bundle.span, "'" + key + "' gives nothing", "say what it adds: [+f]");
        sign.usable = false;
      }
      for (const Setting& setting : sign.settings) given_.insert(setting.node);
      if (written.on) {
        sign.on = ResolveSymbolSet(*written.on);
        sign.usable = sign.usable && sign.on;
      }
      inventory.marks.push_back({SymbolKey(ToUtf8(text)), circle > 0, written.surface, written.symbol.span});
      signs_.push_back(std::move(sign));
    }
  }
}

// By default a diacritic may stand on any base that has the room for what it gives. A feature that is there
// or not brings its articulator along, as secondary articulations do (◌ʷ [round]); one of several values
// tells how an articulator is used (◌̪ [+distributed]), so the base bears it already or the same bundle names
// it.
bool Checker::MayBear(const FeatureTree& content, const Sign& sign) const {
  const Tree& tree = grammar_.tree;
  for (const Setting& setting : sign.settings) {
    if (setting.values.empty() || tree[setting.node].type == TreeNode::Type::kBare) continue;
    for (NodeId above = tree[setting.node].mother; above > kRootNode; above = tree[above].mother) {
      const bool named = std::any_of(sign.settings.begin(), sign.settings.end(),
                                     [&](const Setting& s) { return s.node == above && !s.values.empty(); });
      if (tree[above].standing && !named && !Bears(content, above)) return false;
    }
  }
  return true;
}

void Checker::AddComposite(int base, std::vector<int> marks) {
  Inventory& inventory = grammar_.inventory;
  FeatureTree raw = entries_[static_cast<std::size_t>(base)].raw;
  FeatureTree backward = raw;
  for (const int mark : marks) {
    const Sign& sign = signs_[static_cast<std::size_t>(mark)];
    if (!sign.usable) return;
    if (sign.on ? !SymbolPasses(*sign.on, base) : !MayBear(raw, sign)) return;
    FeatureTree before = raw;
    Apply(sign.settings, &raw);
    if (raw == before) return;  // it adds nothing there
  }
  for (auto mark = marks.rbegin(); mark != marks.rend(); ++mark)
    Apply(signs_[static_cast<std::size_t>(*mark)].settings, &backward);
  if (raw != backward)
    return;  // they are a set: two that ask for different values of one feature cannot stand together
  NodeId no_room = 0;
  if (!HasRoom(raw, &no_room)) return;
  FeatureTree full = raw;
  for (const auto& [value, test] : without_) {
    const bool in = Passes(test, raw, [](int) { return false; });
    if (in && BearsValue(full, value.first, value.second)) Remove(&full, value.first);
  }
  Prune(grammar_.tree, &full);
  const Symbol& under = inventory.symbols[static_cast<std::size_t>(base)];
  if (full == under.full) return;
  Symbol symbol;
  std::string text = under.text;
  symbol.in_underlying = under.in_underlying;
  // Combining marks go before modifier letters, or they would sit on those.
  for (const bool combining : {true, false}) {
    for (const int mark : marks) {
      const Mark& sign = inventory.marks[static_cast<std::size_t>(mark)];
      std::size_t position = 0;
      if (IsMark(NextCodePoint(sign.text, &position)) != combining) continue;
      text = sign.before ? sign.text + text : text + sign.text;
      if (sign.surface) symbol.in_underlying = false;
    }
  }
  symbol.text = SymbolKey(text);
  if (inventory.by_text.count(SymbolSetKey(symbol.text)) != 0) return;  // listed
  symbol.kind = Symbol::Kind::kComposite;
  symbol.full = std::move(full);
  symbol.diacritics = static_cast<int>(marks.size());
  symbol.completes = under.completes;
  symbol.base = base;
  symbol.span = under.span;
  symbol.marks = std::move(marks);
  inventory.by_text[SymbolSetKey(symbol.text)] = static_cast<int>(inventory.symbols.size());
  inventory.symbols.push_back(std::move(symbol));
}

void Checker::BuildComposites() {
  Inventory& inventory = grammar_.inventory;
  const int bases = static_cast<int>(entries_.size());
  const int marks = static_cast<int>(signs_.size());
  for (int mark = 0; mark < marks; ++mark) {
    for (int base = 0; base < bases; ++base) AddComposite(base, {mark});
  }
  if (static_cast<std::size_t>(bases) * static_cast<std::size_t>(marks) * static_cast<std::size_t>(marks) / 2 >
      kMostComposites) {
    diagnostics_.Warning(Kind::kLimit, inventory.marks[0].span,
                         "so many diacritics make too many pairs: only single ones are symbols of themselves",
                         "narrow the bases with `on [..]`, or list the pairs you need in `segments`");
    return;
  }
  for (int first = 0; first < marks; ++first) {
    for (int second = first + 1; second < marks; ++second) {
      for (int base = 0; base < bases; ++base) AddComposite(base, {first, second});
    }
  }
}

// Three and more diacritics on one base are symbols where lexicon, data or rules write them.
void Checker::AddWrittenComposites() {
  if (signs_.size() < 3) return;
  SymbolTrie listed;
  for (std::size_t i = 0; i < entries_.size(); ++i) listed.Add(grammar_.inventory.symbols[i].text, static_cast<int>(i));
  const auto in_set = [&](const auto& self, const syntax::Set& set) -> void {
    if (set.kind == syntax::Set::Kind::kLiteral) AddCompositesOf(set.literal.raw, listed);
    for (const syntax::Set& arg : set.args) self(self, arg);
  };
  const auto in_pattern = [&](const auto& self, const syntax::Pattern& pattern) -> void {
    for (const syntax::Item& item : pattern.items) {
      in_set(in_set, item.set);
      for (const syntax::Pattern& alternative : item.alternatives) self(self, alternative);
    }
  };
  const auto in_clause = [&](const syntax::Clause& clause) {
    in_pattern(in_pattern, clause.where);
    for (const syntax::Pattern& unless : clause.unless) in_pattern(in_pattern, unless);
    for (const syntax::Change& change : clause.changes) in_set(in_set, change.content);
  };
  for (const syntax::Top& top : file_.tops) {
    if (const auto* rule = std::get_if<syntax::Rule>(&top)) {
      in_clause(*rule);
      for (const syntax::Clause& clause : rule->otherwise) in_clause(clause);
    } else if (const auto* fuse = std::get_if<syntax::Fuse>(&top)) {
      if (fuse->in) in_pattern(in_pattern, *fuse->in);
    } else if (const auto* declared = std::get_if<syntax::Class>(&top)) {
      in_set(in_set, declared->set);
    } else if (const auto* pattern = std::get_if<syntax::NamedPattern>(&top)) {
      in_pattern(in_pattern, pattern->pattern);
    } else if (const auto* paradigm = std::get_if<syntax::Paradigm>(&top)) {
      const auto add = [&](const std::vector<syntax::Allomorph>& allomorphs) {
        for (const syntax::Allomorph& allomorph : allomorphs) AddCompositesOf(allomorph.form.raw, listed);
      };
      for (const syntax::ParadigmSlot& slot : paradigm->slots) {
        for (const syntax::SlotValue& value : slot.values) add(value.allomorphs);
      }
      for (const syntax::CellOverride& cell : paradigm->overrides) add(cell.allomorphs);
    }
  }
  for (const DataRow& row : grammar_.data) {
    AddCompositesOf(row.underlying, listed);
    for (const std::string& surface : row.surfaces) AddCompositesOf(surface, listed);
    for (const std::string& surface : row.starred) AddCompositesOf(surface, listed);
  }
  for (const WrittenEntry& written : written_entries_) {
    AddCompositesOf(written.entry.form.raw, listed);
    for (const syntax::Suppletion& other : written.entry.suppletive) AddCompositesOf(other.form.raw, listed);
  }
}

void Checker::AddCompositesOf(std::string_view written, const SymbolTrie& listed) {
  NormalText text;
  text.Assign(written);
  for (std::size_t i = 0; i < text.units.size();) {
    const SymbolTrie::Match match = listed.Longest(text.units.data(), i, text.units.size());
    if (match.symbol < 0) {
      ++i;
      continue;
    }
    i = match.end;
    std::set<int> marks;
    for (bool more = true; more;) {
      more = false;
      for (std::size_t m = 0; m < signs_.size() && !more; ++m) {
        const std::u32string sign = Normalise(grammar_.inventory.marks[m].text);
        bool here = !grammar_.inventory.marks[m].before && sign.size() <= text.units.size() - i;
        for (std::size_t k = 0; here && k < sign.size(); ++k) here = text.units[i + k].code == sign[k];
        if (!here) continue;
        marks.insert(static_cast<int>(m));
        i += sign.size();
        more = true;
      }
    }
    if (marks.size() > 2) AddComposite(match.symbol, std::vector<int>(marks.begin(), marks.end()));
  }
}

// ---- omit -------------------------------------------------------------------------------------------

void Checker::CheckOmit() {
  Inventory& inventory = grammar_.inventory;
  inventory.standing.clear();
  for (const TreeNode& node : grammar_.tree.nodes) inventory.standing.push_back(node.standing);
  for (const syntax::Top& top : file_.tops) {
    const auto* block = std::get_if<syntax::Omit>(&top);
    if (block == nullptr) continue;
    for (const syntax::ValuesIn& line : block->entries) {
      const std::optional<SlotTest> test = line.in ? ResolveSymbolSet(*line.in) : SlotTest{};
      for (const syntax::ValueRef& ref : line.values) {
        for (const auto& [node, value] : ResolveValues(ref, line.span, "omit")) {
          if (!test) continue;
          auto entry = std::find_if(
              inventory.omitted.begin(), inventory.omitted.end(),
              [n = node, v = value](const Inventory::OmitEntry& e) { return e.node == n && e.value == v; });
          if (entry == inventory.omitted.end()) {
            entry = inventory.omitted.insert(entry, {node, value, std::vector<bool>(inventory.symbols.size(), false)});
          }
          for (std::size_t id = 0; id < inventory.symbols.size(); ++id) {
            if (SymbolPasses(*test, static_cast<int>(id))) entry->takes[id] = true;
          }
        }
      }
    }
  }
  // Nothing is taken from a contour.
  const auto take = [](const auto& self, FeatureTree* content, NodeId node, Value value) -> void {
    std::vector<FeatureTree>& daughters = content->daughters;
    for (std::size_t i = 0; i < daughters.size(); ++i) {
      if (daughters[i].node != node) {
        self(self, &daughters[i], node, value);
        continue;
      }
      const bool contour =
          (i > 0 && daughters[i - 1].node == node) || (i + 1 < daughters.size() && daughters[i + 1].node == node);
      if (contour || daughters[i].value != value) continue;
      daughters.erase(daughters.begin() + static_cast<std::ptrdiff_t>(i));
      return;
    }
  };
  for (std::size_t id = 0; id < inventory.symbols.size(); ++id) {
    Symbol& symbol = inventory.symbols[id];
    symbol.underlying = symbol.full;
    for (const Inventory::OmitEntry& entry : inventory.omitted) {
      if (entry.takes[id]) take(take, &symbol.underlying, entry.node, entry.value);
    }
    Prune(grammar_.tree, &symbol.underlying);
  }
}

// ---- after all --------------------------------------------------------------------------------------

void Checker::CheckFallTogether() {
  const Inventory& inventory = grammar_.inventory;
  const auto hash = [](const FeatureTree& tree) { return Hash(tree); };
  std::unordered_map<FeatureTree, int, decltype(hash)> full(64, hash), underlying(64, hash);
  for (std::size_t i = 0; i < entries_.size(); ++i) {
    if (entries_[i].state != Entry::State::kDone) continue;
    const Symbol& symbol = inventory.symbols[i];
    const auto [by_full, first] = full.emplace(symbol.full, static_cast<int>(i));
    const auto [by_underlying, first_underlying] = underlying.emplace(symbol.underlying, static_cast<int>(i));
    if (first && first_underlying) continue;
    const Symbol& other = inventory.symbols[static_cast<std::size_t>(first ? by_underlying->second : by_full->second)];
    const std::string why = first ? "once `omit` has taken its part" : "in this tree";
    const std::string remedy = first ? "let `omit` leave them a difference"
                                     : "give one of them a value of its own, `" + symbol.text + " = " + symbol.text +
                                           " [..]`, or the tree a feature that tells them apart";
    diagnostics_.Add({Kind::kSymbolsFallTogether,
                      Severity::kError,
                      symbol.span,
                      "'" + other.text + "' and '" + symbol.text + "' fall together " + why,
                      remedy,
                      {{other.span, "'" + other.text + "' is listed here"}}});
  }
}

// No output may bear an abstract node: archisegments may, but no symbol that a form could come out as.
void Checker::CheckAbstract() {
  const Tree& tree = grammar_.tree;
  for (std::size_t i = kRootNode + 1; i < tree.nodes.size(); ++i) {
    const NodeId node = static_cast<NodeId>(i);
    if (!tree[node].abstract_) continue;
    for (Symbol& symbol : grammar_.inventory.symbols) {
      if (!Bears(symbol.full, node)) continue;
      if (symbol.kind == Symbol::Kind::kComposite) symbol.completes = false;
      if (symbol.kind != Symbol::Kind::kSegment && symbol.kind != Symbol::Kind::kAllophone) continue;
      diagnostics_.Add(
          {Kind::kBadValue,
           Severity::kError,
           symbol.span,
           "'" + symbol.text + "' bears '" + tree[node].name + "', which is abstract: no output may bear it",
           "take it away, `" + symbol.text + " = " + symbol.text + " [no " + tree[node].name +
               "]`, or list the symbol in `archisegments`",
           {{tree[node].span, "'" + tree[node].name + "' is abstract here"}}});
    }
  }
}

void Checker::CheckUnspecified() {
  if (!from_library_ || diagnostics_.HasErrors()) return;  // a tree with errors is not the one that was meant
  const Tree& tree = grammar_.tree;
  for (std::size_t i = kRootNode + 1; i < tree.nodes.size(); ++i) {
    const NodeId node = static_cast<NodeId>(i);
    const TreeNode& kind = tree[node];
    const bool leaf = kind.type != TreeNode::Type::kClass || kind.daughters.empty();
    if (!leaf || kind.abstract_ || IsSlotBorne(node) || given_.count(node) != 0) continue;
    const bool known = std::any_of(libraries_.begin(), libraries_.end(),
                                   [&](const auto& l) { return l.second.KnowsFeature(kind.name); });
    if (known) continue;
    diagnostics_.Warning(
        Kind::kUnspecifiedFeature, kind.span,
        "the library does not know '" + kind.name + "', and no line of `segments` gives it: no segment bears it",
        Or(DidYouMean(kind.name, libraries_.begin()->second.Features()),
           "give it to the segments that bear it: `x = x [" + tree.ValueName(node, 1) + "]`"));
  }
}

void Checker::CheckInventory() {
  CollectEntries();
  RebuildTrie();
  BuildTrees();
  TakeWithout();
  CheckDiacritics();
  BuildComposites();
  AddWrittenComposites();
  RebuildTrie();
  CheckOmit();
  CheckFallTogether();
  CheckAbstract();
  CheckUnspecified();
}

}  // namespace tiersmith
