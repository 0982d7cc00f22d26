// Reading the short notations of small_grammar.h. A wrong notation throws: it is a mistake in the test.
#include "support/small_grammar.h"

#include <algorithm>
#include <cctype>
#include <map>
#include <sstream>
#include <stdexcept>
#include <tuple>

#include "model/content.h"

namespace tiersmith::testing {
namespace {

// A word is what stands between spaces; brackets of any kind are kept whole.
std::vector<std::string> Words(const std::string& text) {
  std::vector<std::string> words;
  std::string word;
  int depth = 0;
  for (char c : text) {
    depth += c == '[' || c == '{';
    depth -= c == ']' || c == '}';
    if (c == ' ' && depth == 0) {
      if (!word.empty()) words.push_back(word);
      word.clear();
    } else {
      word += c;
    }
  }
  if (!word.empty()) words.push_back(word);
  return words;
}

NodeId AddNode(Tree* tree, const std::string& name, TreeNode::Type type, NodeId mother) {
  TreeNode node;
  node.name = name;
  node.type = type;
  node.mother = mother;
  const NodeId id = static_cast<NodeId>(tree->nodes.size());
  tree->nodes.push_back(node);
  if (id != mother) tree->nodes[mother].daughters.push_back(id);
  return id;
}

void AddTree(Tree* tree) {
  using Type = TreeNode::Type;
  AddNode(tree, "slot", Type::kClass, 0);
  const NodeId root = AddNode(tree, "root", Type::kClass, kSlotNode);
  for (const char* name : {"cons", "son", "syll", "nasal", "cont"}) AddNode(tree, name, Type::kBinary, root);
  tree->nodes.back().max = 2;
  SlotTest obstruent;
  obstruent.op = SlotTest::Op::kBundle;
  obstruent.bundle = {{FeatureTest::Kind::kHasValue, *tree->Find("son"), 0}};
  tree->nodes.back().room = obstruent;
  const NodeId laryngeal = AddNode(tree, "Laryngeal", Type::kClass, root);
  AddNode(tree, "voice", Type::kBinary, laryngeal);
  const NodeId place = AddNode(tree, "Place", Type::kClass, root);
  const NodeId labial = AddNode(tree, "Labial", Type::kClass, place);
  const NodeId coronal = AddNode(tree, "Coronal", Type::kClass, place);
  const NodeId dorsal = AddNode(tree, "Dorsal", Type::kClass, place);
  for (NodeId node : {labial, coronal, dorsal}) tree->nodes[node].standing = true;
  AddNode(tree, "round", Type::kBare, labial);
  AddNode(tree, "ant", Type::kBinary, coronal);
  AddNode(tree, "high", Type::kBinary, dorsal);
  AddNode(tree, "back", Type::kBinary, dorsal);
}

// "+voice -cont +cont Coronal no Place" -> what it says, node by node, in the order written.
struct Said {
  NodeId node;
  bool no = false;
  bool bare = false;
  std::vector<Value> values;
};
std::vector<Said> Read(const Tree& tree, const std::string& text) {
  std::vector<Said> result;
  bool no = false;
  for (const std::string& word : Words(text)) {
    if (word == "no") {
      no = true;
      continue;
    }
    const bool sign = word[0] == '+' || word[0] == '-';
    const std::string name = sign ? word.substr(1) : word.substr(0, word.find(':'));
    const auto node = tree.Find(name);
    if (!node) throw std::runtime_error("no node " + name);
    Said said{*node, no, !sign && name == word, {}};
    if (sign) said.values = {static_cast<Value>(word[0] == '+')};
    if (!sign && name != word) {
      const auto& values = tree[*node].values;
      const auto at = std::find(values.begin(), values.end(), word.substr(name.size() + 1));
      if (at == values.end()) throw std::runtime_error("no value " + word);
      said.values = {static_cast<Value>(at - values.begin())};
    }
    if (said.bare && !no) said.values = {0};
    no = false;
    if (!result.empty() && result.back().node == said.node) {
      result.back().values.insert(result.back().values.end(), said.values.begin(), said.values.end());
    } else {
      result.push_back(said);
    }
  }
  return result;
}

void ApplyBundle(const Tree& tree, FeatureTree* root, const std::string& bundle) {
  for (const Said& said : Read(tree, bundle)) {
    const bool class_node = tree[said.node].type == TreeNode::Type::kClass;
    if (said.no) {
      Remove(root, said.node);
    } else if (class_node) {
      Ensure(tree, root, said.node);
    } else {
      SetValues(tree, root, said.node, said.values);
    }
  }
}

void AddSymbol(Grammar* grammar, const std::string& text, const std::string& bundle) {
  Symbol symbol;
  symbol.text = text;
  symbol.full.node = kRootNode;
  ApplyBundle(grammar->tree, &symbol.full, bundle);
  Prune(grammar->tree, &symbol.full);
  symbol.underlying = symbol.full;
  grammar->inventory.by_text[text] = static_cast<int>(grammar->inventory.symbols.size());
  grammar->inventory.symbols.push_back(symbol);
}

void AddSymbols(Grammar* grammar) {
  const std::string stop = "+cons -son -syll -nasal -cont ", fricative = "+cons -son -syll -nasal +cont ",
                    nasal = "+cons +son -syll +nasal -cont ", vowel = "-cons +son +syll -nasal +cont ";
  const std::string cor = " Coronal +ant", dor = " Dorsal +high +back";
  AddSymbol(grammar, "p", stop + "-voice Labial");
  AddSymbol(grammar, "t", stop + "-voice" + cor);
  AddSymbol(grammar, "k", stop + "-voice" + dor);
  AddSymbol(grammar, "b", stop + "+voice Labial");
  AddSymbol(grammar, "d", stop + "+voice" + cor);
  AddSymbol(grammar, "g", stop + "+voice" + dor);
  AddSymbol(grammar, "m", nasal + "+voice Labial");
  AddSymbol(grammar, "n", nasal + "+voice" + cor);
  AddSymbol(grammar, "ŋ", nasal + "+voice" + dor);
  AddSymbol(grammar, "s", fricative + "-voice" + cor);
  AddSymbol(grammar, "z", fricative + "+voice" + cor);
  AddSymbol(grammar, "c", "+cons -son -syll -nasal -cont +cont -voice" + cor);
  AddSymbol(grammar, "N", nasal + "+voice");
  AddSymbol(grammar, "i", vowel + "+voice Dorsal +high -back");
  AddSymbol(grammar, "u", vowel + "+voice Labial round Dorsal +high +back");
  AddSymbol(grammar, "a", vowel + "+voice Dorsal -high +back");
  AddSymbol(grammar, "E", vowel + "+voice");
  AddSymbol(grammar, "T", stop + cor);
  AddSymbol(grammar, "I", vowel + "+voice Dorsal +high");
  AddSymbol(grammar, "A", vowel + "+voice Dorsal -high");
  for (Symbol& symbol : grammar->inventory.symbols) {
    const bool lacks = symbol.text == "N" || symbol.text == "T" || symbol.text == "I" || symbol.text == "A";
    if (lacks) symbol.kind = Symbol::Kind::kArchisegment;
    symbol.completes = !lacks;
  }
}

// ---- forms --------------------------------------------------------------------------------------

Boundary BoundaryOf(const std::string& text) {
  const std::string word = text.substr(0, text.find('@'));
  if (word == "-") return Boundary::kMorpheme;
  if (word == "=") return Boundary::kClitic;
  if (word == "#") return Boundary::kWord;
  if (word == "‖") return Boundary::kPhrase;
  return Boundary::kNone;
}

int TagOf(const Grammar& grammar, const std::string& name) {
  const auto at = std::find(grammar.tags.begin(), grammar.tags.end(), name);
  if (at == grammar.tags.end()) throw std::runtime_error("no tag " + name);
  return static_cast<int>(at - grammar.tags.begin());
}

InstanceId* Find(Form* form, InstanceId mother, NodeId node, int count) {
  for (InstanceId& daughter : form->instances[mother].daughters) {
    if (form->instances[daughter].node == node && --count == 0) return &daughter;
  }
  for (InstanceId daughter : std::vector<InstanceId>(form->instances[mother].daughters)) {
    if (InstanceId* found = Find(form, daughter, node, count)) return found;
  }
  return nullptr;
}

class FormReader {
 public:
  explicit FormReader(const Grammar& grammar) : grammar_(grammar) {}

  Form Run(const std::string& text) {
    for (const std::string& word : Words(text)) {
      const Boundary boundary = BoundaryOf(word);
      if (boundary != Boundary::kNone) {
        form_.items.push_back({FormItem::Kind::kBoundary, boundary, 0, TagsOf(word)});
      } else {
        Slot(word);
      }
    }
    for (const auto& [slot, node, count, mark] : shares_) Share(slot, node, count, mark);
    const std::string defects = Defects(form_, grammar_.tree);
    if (!defects.empty()) throw std::runtime_error("'" + text + "': " + defects);
    return Canonical(form_);
  }

 private:
  std::uint64_t TagsOf(const std::string& word) const {
    std::uint64_t tags = 0;
    for (std::size_t at = word.find('@'); at != std::string::npos; at = word.find('@', at + 1)) {
      tags |= std::uint64_t{1} << TagOf(grammar_, word.substr(at + 1, word.find('@', at + 1) - at - 1));
    }
    return tags;
  }

  void Slot(const std::string& word) {
    const InstanceId slot = static_cast<InstanceId>(form_.instances.size());
    form_.instances.push_back({kSlotNode, 0, {}});
    form_.items.push_back({FormItem::Kind::kSlot, Boundary::kNone, slot});
    if (word == "_") return;
    const std::size_t brace = word.find('{');
    FeatureTree root = ContentOfSymbol(grammar_, word.substr(0, brace));
    if (brace != std::string::npos) {
      std::string bundle;
      for (const std::string& part : Words(word.substr(brace + 1, word.size() - brace - 2))) {
        const std::size_t colon = part.find(':');
        if (colon == std::string::npos || !std::isdigit(static_cast<unsigned char>(part[colon + 1]))) {
          bundle += part + " ";
          continue;
        }
        const std::string path = part.substr(0, colon);
        const std::size_t stroke = path.find('/');
        const int count = stroke == std::string::npos ? 1 : std::stoi(path.substr(stroke + 1));
        shares_.push_back({slot, NodeOf(grammar_, path.substr(0, stroke)), count, part.substr(colon)});
      }
      ApplyBundle(grammar_.tree, &root, bundle);
      Prune(grammar_.tree, &root);
    }
    const InstanceId id = AddContent(form_, root);
    form_.instances[slot].daughters.push_back(id);
  }

  void Share(InstanceId slot, NodeId node, int count, const std::string& mark) {
    InstanceId* at = Find(&form_, slot, node, count);
    if (at == nullptr) throw std::runtime_error("no " + grammar_.tree[node].name + " to share");
    const auto [first, fresh] = marked_.insert({{node, mark}, *at});
    if (!fresh) *at = first->second;
  }

  const Grammar& grammar_;
  Form form_;
  std::vector<std::tuple<InstanceId, NodeId, int, std::string>> shares_;
  std::map<std::pair<NodeId, std::string>, InstanceId> marked_;
};

// "αback", "-βback".
bool VariableTest(const Grammar& grammar, const std::string& word, FeatureTest* test) {
  const bool minus = word[0] == '-';
  const std::string rest = word.substr(minus ? 1 : 0);
  const int variable = rest.compare(0, 2, "α") == 0 ? 0 : rest.compare(0, 2, "β") == 0 ? 1 : -1;
  if (variable < 0) return false;
  test->kind = minus ? FeatureTest::Kind::kDiffers : FeatureTest::Kind::kAgrees;
  test->node = NodeOf(grammar, rest.substr(2));
  test->variable = variable;
  return true;
}

// What is no value and no node; `next` is taken by "shared" and the like, for any node but the root.
bool SpecialTest(const Grammar& grammar, const std::string& word, const std::string& next, FeatureTest* test) {
  using Kind = FeatureTest::Kind;
  if (VariableTest(grammar, word, test)) return true;
  const std::map<std::string, Kind> of_root = {
      {"long", Kind::kLong}, {"short", Kind::kShort}, {"half1", Kind::kHalfFirst}, {"half2", Kind::kHalfSecond}};
  if (const auto found = of_root.find(word); found != of_root.end()) {
    test->kind = found->second;
    test->node = kRootNode;
    return true;
  }
  if (word == "begins" || word == "ends") {
    test->kind = Kind::kHasValue;
    test->node = NodeOf(grammar, next.substr(1));
    test->value = next[0] == '+';
    test->part = word == "begins" ? FeatureTest::Part::kFirst : FeatureTest::Part::kLast;
    return true;
  }
  const std::string name = word.substr(0, word.find_first_of("<>"));
  if (name != "shared" && name != "unshared") return false;
  test->kind = name == "shared" ? Kind::kShared : Kind::kUnshared;
  test->node = NodeOf(grammar, next);
  if (word.back() == '<') test->side = FeatureTest::Side::kLeft;
  if (word.back() == '>') test->side = FeatureTest::Side::kRight;
  return true;
}

SlotTest TestOf(const Grammar& grammar, const std::string& text) {
  SlotTest test;
  if (text == "empty") {
    test.op = SlotTest::Op::kEmpty;
    return test;
  }
  const std::size_t bar = text.find("|");
  if (bar != std::string::npos) {
    test.op = SlotTest::Op::kOr;
    test.args = {TestOf(grammar, text.substr(0, bar)), TestOf(grammar, text.substr(bar + 1))};
    return test;
  }
  if (text.compare(0, 3, "not") == 0) {
    test.op = SlotTest::Op::kNot;
    test.args = {TestOf(grammar, text.substr(3))};
    return test;
  }
  if (text.size() < 2 || text.front() != '[' || text.back() != ']') throw std::runtime_error("no test: " + text);
  return BundleOf(grammar, text.substr(1, text.size() - 2));
}

void NoteStanding(Grammar* grammar) {
  for (const TreeNode& node : grammar->tree.nodes) grammar->inventory.standing.push_back(node.standing);
}

}  // namespace

Grammar SmallGrammar() {
  Grammar grammar;
  AddTree(&grammar.tree);
  AddSymbols(&grammar);
  NoteStanding(&grammar);
  return grammar;
}

Grammar WideGrammar() {
  using Type = TreeNode::Type;
  Grammar grammar;
  AddTree(&grammar.tree);
  const NodeId tone = AddNode(&grammar.tree, "Tone", Type::kMany, kSlotNode);
  grammar.tree.nodes[tone].values = {"H", "L", "M"};
  grammar.tree.nodes[tone].max = 3;
  grammar.tree.nodes[tone].floating = true;
  const NodeId cplace = AddNode(&grammar.tree, "Cplace", Type::kClass, kRootNode);
  grammar.tree.nodes[cplace].max = 2;
  grammar.tree.nodes[cplace].floating = true;
  AddNode(&grammar.tree, "grave", Type::kBinary, cplace);
  const NodeId lip = AddNode(&grammar.tree, "Lip", Type::kClass, cplace);
  grammar.tree.nodes[lip].standing = true;
  AddNode(&grammar.tree, "lip2", Type::kBare, lip);
  AddSymbols(&grammar);
  NoteStanding(&grammar);
  return grammar;
}

NodeId NodeOf(const Grammar& grammar, const std::string& name) {
  const auto node = grammar.tree.Find(name);
  if (!node) throw std::runtime_error("no node " + name);
  return *node;
}

SlotTest BundleOf(const Grammar& grammar, const std::string& text) {
  SlotTest test;
  if (text.empty()) return test;
  test.op = SlotTest::Op::kBundle;
  std::string plain;
  const std::vector<std::string> words = Words(text);
  for (std::size_t i = 0; i < words.size(); ++i) {
    FeatureTest feature;
    if (SpecialTest(grammar, words[i], i + 1 < words.size() ? words[i + 1] : "", &feature)) {
      test.bundle.push_back(feature);
      i += feature.variable < 0 && feature.node != kRootNode ? 1 : 0;
    } else {
      plain += words[i] + " ";
    }
  }
  for (const Said& said : Read(grammar.tree, plain)) {
    if (said.no) {
      test.bundle.push_back({FeatureTest::Kind::kLacks, said.node, 0});
    } else if (said.bare) {
      test.bundle.push_back({FeatureTest::Kind::kBears, said.node, 0});
    } else {
      for (Value value : said.values) test.bundle.push_back({FeatureTest::Kind::kHasValue, said.node, value});
    }
  }
  return test;
}

std::vector<Setting> SettingsOf(const Grammar& grammar, const std::string& text) {
  std::vector<Setting> settings;
  std::string plain;
  for (const std::string& word : Words(text)) {
    FeatureTest variable;
    if (!VariableTest(grammar, word, &variable)) {
      plain += word + " ";
      continue;
    }
    settings.push_back({variable.node, {}, variable.variable, variable.kind == FeatureTest::Kind::kDiffers});
  }
  for (const Said& said : Read(grammar.tree, plain)) settings.push_back({said.node, said.values});
  return settings;
}

FeatureTree ContentOfSymbol(const Grammar& grammar, const std::string& symbol) {
  const auto found = grammar.inventory.Find(symbol);
  if (!found) throw std::runtime_error("no symbol " + symbol);
  return grammar.inventory.symbols[*found].underlying;
}

Form FormOf(const Grammar& grammar, const std::string& text) { return FormReader(grammar).Run(text); }

// ---- rules --------------------------------------------------------------------------------------

RuleBuilder::RuleBuilder(const Grammar& grammar, const std::string& where) : grammar_(grammar) {
  rule_.name = where;
  rule_.where = PatternOf(where);
}

RuleBuilder& RuleBuilder::Otherwise(const std::string& where) {
  rule_.otherwise.emplace_back();
  rule_.name += " otherwise " + where;
  clause().where = PatternOf(where);
  return *this;
}

int RuleBuilder::LabelOf(const std::string& name, Clause::LabelKind kind) {
  std::vector<std::string>& labels = clause().labels;
  const auto at = std::find(labels.begin(), labels.end(), name);
  const int label = static_cast<int>(at - labels.begin());
  if (at == labels.end()) {
    labels.push_back(name);
    clause().label_kinds.push_back(kind);
  }
  return label;
}

RuleBuilder::Path RuleBuilder::PathOf(const std::string& text) {
  const std::size_t dot = text.find('.');
  Path path{LabelOf(text.substr(0, dot)), 0, {}};
  std::string name = text.substr(dot + 1);
  if (name[0] == '+' || name[0] == '-') {
    path.member = {Member::Which::kValue, static_cast<Value>(name[0] == '+')};
    name = name.substr(1);
  } else if (const std::size_t stroke = name.find('/'); stroke != std::string::npos) {
    path.member.which = name.substr(stroke) == "/first" ? Member::Which::kFirst : Member::Which::kLast;
    name = name.substr(0, stroke);
  }
  path.node = NodeOf(grammar_, name);
  return path;
}

Pattern RuleBuilder::PatternOf(const std::string& text) {
  std::vector<Pattern> open(1);  // the pattern and the groups that are open in it
  for (const std::string& word : Words(text)) {
    PatternItem item;
    const std::size_t sign = word.find(':');
    const Boundary boundary = BoundaryOf(sign == std::string::npos ? word : word.substr(sign + 1));
    if (word == "(") {
      open.emplace_back();
      continue;
    }
    if (word[0] == ')') {
      item.kind = PatternItem::Kind::kGroup;
      item.alternatives = {open.back()};
      item.min = 0;
      item.max = 1;
      if (word.size() > 1) {
        const std::size_t dash = word.find('-');
        item.min = std::stoi(word.substr(1, dash - 1));
        item.max = dash + 1 == word.size() ? -1 : std::stoi(word.substr(dash + 1));
      }
      open.pop_back();
    } else if (boundary != Boundary::kNone) {
      item.kind = PatternItem::Kind::kBoundary;
      item.boundary = boundary;
      if (sign != std::string::npos) item.label = LabelOf(word.substr(0, sign), Clause::LabelKind::kBoundary);
    } else if (word == "&") {
      item.kind = PatternItem::Kind::kSameMorpheme;
    } else if (word.compare(0, 3, "...") == 0) {
      item.kind = PatternItem::Kind::kGap;
      if (word.size() > 3) item.tier = NodeOf(grammar_, word.substr(3));
    } else {
      const std::size_t colon = word.find(':');
      const bool labelled = colon != std::string::npos && colon < word.find('[');
      const bool bare = !labelled && word.find('[') == std::string::npos && word != "empty";
      if (labelled || bare) item.label = LabelOf(word.substr(0, colon));
      if (!bare) item.test = TestOf(grammar_, labelled ? word.substr(colon + 1) : word);
      for (const FeatureTest& test : item.test.bundle) {
        clause().variables = std::max(clause().variables, test.variable + 1);
      }
    }
    open.back().items.push_back(item);
  }
  open[0].names_empty = text.find("empty") != std::string::npos;
  return open[0];
}

Change& RuleBuilder::Add(Change::Op op, const std::string& target) {
  Change change;
  change.op = op;
  change.target = LabelOf(target);
  clause().changes.push_back(change);
  return clause().changes.back();
}

RuleBuilder& RuleBuilder::Unless(const std::string& pattern) {
  const Pattern read = PatternOf(pattern);
  clause().unless.push_back(read);
  return *this;
}
RuleBuilder& RuleBuilder::If(const std::string& condition) {
  const std::vector<std::string> words = Words(condition);
  const Path left = PathOf(words[0]), right = PathOf(words[2]);
  const std::map<std::string, Condition::Test> tests = {{"=", Condition::Test::kEqual},
                                                        {"≠", Condition::Test::kUnequal},
                                                        {"is", Condition::Test::kSame},
                                                        {"isnot", Condition::Test::kNotSame}};
  Condition read;
  read.test = tests.at(words[1]);
  read.left = left.label;
  read.right = right.label;
  read.node = left.node;
  read.left_member = left.member;
  read.right_member = right.member;
  clause().conditions.push_back(read);
  return *this;
}
RuleBuilder& RuleBuilder::Only(const std::string& tag) {
  AddTag(tag, true);
  return *this;
}
RuleBuilder& RuleBuilder::Except(const std::string& tag) {
  AddTag(tag, false);
  return *this;
}
void RuleBuilder::AddTag(const std::string& text, bool only) {
  const std::vector<std::string> words = Words(text);
  TagTest test;
  test.only = only;
  test.tag = TagOf(grammar_, words.back());
  if (words.size() == 2) test.scope = TagTest::Scope::kWord;
  if (words.size() == 3) {
    test.scope = TagTest::Scope::kLabel;
    test.label = LabelOf(words[0]);
  }
  clause().tags.push_back(test);
}
RuleBuilder& RuleBuilder::Spread(const std::string& path, const std::string& target) {
  const Path source = PathOf(path);
  Change& change = Add(Change::Op::kSpread, target);
  change.source = source.label;
  change.node = source.node;
  change.member = source.member;
  return *this;
}
RuleBuilder& RuleBuilder::Delink(const std::string& path) {
  const Path target = PathOf(path);
  Change& change = Add(Change::Op::kDelink, path.substr(0, path.find('.')));
  change.node = target.node;
  change.member = target.member;
  return *this;
}
RuleBuilder& RuleBuilder::SetAs(const std::string& target, const std::string& source) {
  const Path from = PathOf(source);
  Change& change = Add(Change::Op::kSetAs, target.substr(0, target.find('.')));
  change.source = from.label;
  change.node = from.node;
  change.member = from.member;
  return *this;
}
RuleBuilder& RuleBuilder::FillAs(const std::string& target, const std::string& source) {
  SetAs(target, source);
  clause().changes.back().op = Change::Op::kFillAs;
  return *this;
}
RuleBuilder& RuleBuilder::Merge(const std::string& source, const std::string& target) {
  SetAs(target, source);
  clause().changes.back().op = Change::Op::kMerge;
  return *this;
}
RuleBuilder& RuleBuilder::SetLiteral(const std::string& label, const std::string& symbol) {
  Literal(symbol, &Add(Change::Op::kSetLiteral, label));
  return *this;
}
void RuleBuilder::Literal(const std::string& symbol, Change* change) {
  const std::size_t sign = symbol.find("ː");
  change->inserted = ContentOfSymbol(grammar_, symbol.substr(0, sign));
  change->is_long = sign != std::string::npos;
}
RuleBuilder& RuleBuilder::Lengthen(const std::string& label) {
  Add(Change::Op::kLengthen, label);
  return *this;
}
RuleBuilder& RuleBuilder::Shorten(const std::string& label) {
  Add(Change::Op::kShorten, label);
  return *this;
}
RuleBuilder& RuleBuilder::Set(const std::string& label, const std::string& bundle) {
  Add(Change::Op::kSet, label).settings = SettingsOf(grammar_, bundle);
  return *this;
}
RuleBuilder& RuleBuilder::Fill(const std::string& label, const std::string& bundle) {
  Add(Change::Op::kFill, label).settings = SettingsOf(grammar_, bundle);
  return *this;
}
RuleBuilder& RuleBuilder::Insert(const std::string& symbol, bool before, const std::string& host,
                                 const std::string& label) {
  const int inserted = label.empty() ? -1 : LabelOf(label, Clause::LabelKind::kInserted);
  Change& change = Add(Change::Op::kInsert, host);
  Literal(symbol, &change);
  change.before = before;
  change.inserted_label = inserted;
  return *this;
}
RuleBuilder& RuleBuilder::Delete(const std::string& label) {
  Add(Change::Op::kDelete, label);
  return *this;
}
RuleBuilder& RuleBuilder::Mode(Rule::Mode mode) {
  rule_.mode = mode;
  return *this;
}
RuleBuilder& RuleBuilder::Within(Domain domain) {
  rule_.within = domain;
  return *this;
}
RuleBuilder& RuleBuilder::Prefer(Rule::Prefer side) {
  rule_.prefer = side;
  return *this;
}
RuleBuilder& RuleBuilder::Preserving() {
  rule_.preserving = true;
  return *this;
}
RuleBuilder& RuleBuilder::SharingBlocked() {
  rule_.sharing_blocked = true;
  return *this;
}
RuleBuilder& RuleBuilder::Optional(double probability, bool by_word) {
  rule_.probability = probability;
  rule_.by_word = by_word;
  return *this;
}

}  // namespace tiersmith::testing
