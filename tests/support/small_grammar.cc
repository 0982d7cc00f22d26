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

Boundary BoundaryOf(const std::string& word) {
  if (word == "-") return Boundary::kMorpheme;
  if (word == "=") return Boundary::kClitic;
  if (word == "#") return Boundary::kWord;
  if (word == "‖") return Boundary::kPhrase;
  return Boundary::kNone;
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
        form_.items.push_back({FormItem::Kind::kBoundary, boundary, 0});
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
  for (const Said& said : Read(grammar.tree, text)) {
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
  for (const Said& said : Read(grammar.tree, text)) settings.push_back({said.node, said.values});
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

int RuleBuilder::LabelOf(const std::string& name) {
  const auto at = std::find(rule_.labels.begin(), rule_.labels.end(), name);
  const int label = static_cast<int>(at - rule_.labels.begin());
  if (at == rule_.labels.end()) rule_.labels.push_back(name);
  return label;
}

Pattern RuleBuilder::PatternOf(const std::string& text) {
  std::vector<Pattern> open(1);  // the pattern and the groups that are open in it
  for (const std::string& word : Words(text)) {
    PatternItem item;
    const Boundary boundary = BoundaryOf(word);
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
    } else if (word.compare(0, 3, "...") == 0) {
      item.kind = PatternItem::Kind::kGap;
      if (word.size() > 3) item.tier = NodeOf(grammar_, word.substr(3));
    } else {
      const std::size_t colon = word.find(':');
      const bool labelled = colon != std::string::npos && colon < word.find('[');
      const bool bare = !labelled && word.find('[') == std::string::npos && word != "empty";
      if (labelled || bare) item.label = LabelOf(word.substr(0, colon));
      if (!bare) item.test = TestOf(grammar_, labelled ? word.substr(colon + 1) : word);
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
  rule_.changes.push_back(change);
  return rule_.changes.back();
}

RuleBuilder& RuleBuilder::Unless(const std::string& pattern) {
  rule_.unless.push_back(PatternOf(pattern));
  return *this;
}
RuleBuilder& RuleBuilder::Spread(const std::string& path, const std::string& target) {
  const std::size_t dot = path.find('.');
  Change& change = Add(Change::Op::kSpread, target);
  change.source = LabelOf(path.substr(0, dot));
  change.node = NodeOf(grammar_, path.substr(dot + 1));
  return *this;
}
RuleBuilder& RuleBuilder::Delink(const std::string& path) {
  const std::size_t dot = path.find('.');
  Add(Change::Op::kDelink, path.substr(0, dot)).node = NodeOf(grammar_, path.substr(dot + 1));
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
RuleBuilder& RuleBuilder::Insert(const std::string& symbol, bool before, const std::string& host) {
  Change& change = Add(Change::Op::kInsert, host);
  change.inserted = ContentOfSymbol(grammar_, symbol);
  change.before = before;
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

}  // namespace tiersmith::testing
