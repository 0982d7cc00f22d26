// Checking data and explaining failures. See check.h for what the explanation means.
#include "analyse/check.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <set>

#include "base/limits.h"
#include "base/utf8.h"
#include "graph/interpreter.h"

namespace tiersmith {
namespace {

// ---- derivations --------------------------------------------------------------------------------------
struct Walk {
  std::vector<Form> forms;  // forms[0] underlying, forms[k + 1] after rule k
  std::vector<Application> applications;
  std::string problem;
};

std::string Quoted(const std::string& name) { return "'" + name + "'"; }

Walk Derivation(const Grammar& grammar, const Form& underlying) {
  Walk walk;
  walk.forms.push_back(grammar.fusions.empty() ? underlying : Fused(grammar, underlying));
  for (const Rule& rule : grammar.rules) {
    Application application = ApplyRule(grammar, rule, walk.forms.back(), true);
    if (!application.ambiguous.empty()) {
      walk.problem = "rule " + Quoted(rule.name) + " is ambiguous here: " + application.ambiguous;
    } else if (!application.reaches.empty()) {
      walk.problem = "rule " + Quoted(rule.name) + " reaches another segment: " + application.reaches;
    } else if (!application.too_many.empty()) {
      walk.problem = "rule " + Quoted(rule.name) + ": " + application.too_many;
    }
    walk.forms.push_back(application.form);
    walk.applications.push_back(std::move(application));
    if (!walk.problem.empty()) break;
  }
  return walk;
}

// The surface from `form` on, rules `from` and later applying; none if there is no result.
std::optional<std::string> Finish(const Grammar& grammar, Form form, std::size_t from) {
  for (std::size_t k = from; k < grammar.rules.size(); ++k) {
    Application application = ApplyRule(grammar, grammar.rules[k], form, false);
    if (!application.ambiguous.empty() || !application.reaches.empty()) return std::nullopt;
    form = std::move(application.form);
  }
  std::string text;
  FeatureTree no_symbol;
  if (!WriteForm(grammar, form, &text, &no_symbol)) return std::nullopt;
  return text;
}

// ---- alignment ----------------------------------------------------------------------------------------
// A timing slot of a form, or a symbol of an expected surface.
struct Unit {
  std::string text;                 // what spells it; a description if nothing does
  std::optional<FeatureTree> tree;  // none: an empty slot, or a symbol the grammar does not know
  friend bool operator==(const Unit& a, const Unit& b) { return a.tree == b.tree && (a.tree || a.text == b.text); }
};

struct Pairing {
  int left = -1;   // -1: inserted on the right
  int right = -1;  // -1: missing on the right
};

void CollectLeaves(const FeatureTree& tree, std::multiset<std::pair<NodeId, Value>>& leaves) {
  leaves.insert({tree.node, tree.value});
  for (const FeatureTree& daughter : tree.daughters) CollectLeaves(daughter, leaves);
}

// 0 for equal units, up to 1.5: a substitution is always cheaper than a deletion with an insertion.
double Distance(const Unit& a, const Unit& b) {
  if (a == b) return 0;
  if (!a.tree || !b.tree) return 1.5;
  std::multiset<std::pair<NodeId, Value>> x, y, common;
  CollectLeaves(*a.tree, x);
  CollectLeaves(*b.tree, y);
  std::set_intersection(x.begin(), x.end(), y.begin(), y.end(), std::inserter(common, common.end()));
  const double all = static_cast<double>(x.size() + y.size());
  return 0.5 + (all - 2.0 * static_cast<double>(common.size())) / all;
}

// Least-cost alignment (Wagner & Fischer 1974), substitutions weighted by how many features differ.
std::vector<Pairing> Align(const std::vector<Unit>& left, const std::vector<Unit>& right, double* cost) {
  const std::size_t n = left.size(), m = right.size();
  std::vector<std::vector<double>> best(n + 1, std::vector<double>(m + 1, 0));
  for (std::size_t i = 0; i <= n; ++i) {
    for (std::size_t j = 0; j <= m; ++j) {
      if (i == 0 || j == 0) {
        best[i][j] = static_cast<double>(i + j);
        continue;
      }
      best[i][j] =
          std::min({best[i - 1][j - 1] + Distance(left[i - 1], right[j - 1]), best[i - 1][j] + 1, best[i][j - 1] + 1});
    }
  }
  std::vector<Pairing> pairs;
  std::size_t i = n, j = m;
  while (i > 0 || j > 0) {
    const bool pair =
        i > 0 && j > 0 && std::abs(best[i][j] - best[i - 1][j - 1] - Distance(left[i - 1], right[j - 1])) < 1e-9;
    const bool gone = !pair && i > 0 && std::abs(best[i][j] - best[i - 1][j] - 1) < 1e-9;
    Pairing next;
    if (pair || gone) next.left = static_cast<int>(--i);
    if (!gone) next.right = static_cast<int>(--j);
    pairs.push_back(next);
  }
  std::reverse(pairs.begin(), pairs.end());
  if (cost != nullptr) *cost = best[n][m];
  return pairs;
}

std::vector<Unit> UnitsOf(const Grammar& grammar, const Form& form, bool empty_slots) {
  std::vector<Unit> units;
  for (const FormItem& item : form.items) {
    if (item.kind != FormItem::Kind::kSlot) continue;
    const std::int64_t root = RootOf(form, item);
    if (root < 0) {
      if (empty_slots) units.push_back({"", std::nullopt});
      continue;
    }
    const FeatureTree tree = ContentOf(form, static_cast<InstanceId>(root));
    const Inventory::Spelling& spelling = grammar.inventory.Spell(tree);
    units.push_back({spelling.symbol >= 0 ? grammar.inventory.symbols[static_cast<std::size_t>(spelling.symbol)].text
                                          : grammar.inventory.Describe(tree, grammar.tree),
                     tree});
  }
  return units;
}

// The expected surface as units; where it cannot be read, by characters with their marks.
std::vector<Unit> UnitsOfText(const Grammar& grammar, const Reader& reader, const std::string& text) {
  std::vector<Token> tokens;
  TextError error;
  if (reader.Read(text, Reader::Side::kSurface, &tokens, &error)) {
    return UnitsOf(grammar, reader.FormOf(tokens, Reader::Side::kSurface), false);
  }
  std::vector<Unit> units;
  for (std::size_t position = 0; position < text.size();) {
    const std::size_t begin = position;
    const char32_t c = NextCodePoint(text, &position);
    const std::string piece = text.substr(begin, position - begin);
    if (IsMark(c) && !units.empty()) {
      units.back().text += piece;
    } else if (c != U' ') {
      units.push_back({piece, std::nullopt});
    }
  }
  for (Unit& unit : units) {
    const std::optional<int> symbol = grammar.inventory.Find(unit.text);
    if (symbol) unit.tree = grammar.inventory.symbols[static_cast<std::size_t>(*symbol)].full;
  }
  return units;
}

bool SameText(const Unit& a, const Unit& b) { return ToNfd(a.text) == ToNfd(b.text); }

// ---- the first difference ------------------------------------------------------------------------------
// Where derived and expected part: slot `slot` of the derived form is wrong, or (gap) a segment is missing before it.
struct Difference {
  bool found = false;
  bool gap = false;
  std::size_t slot = 0;  // counted over the slots that hold a root
  std::string words;
};

Difference FirstDifference(const std::vector<Unit>& derived, const std::vector<Unit>& expected) {
  Difference difference;
  std::size_t slot = 0;
  for (const Pairing& pair : Align(derived, expected, nullptr)) {
    const bool same =
        pair.left >= 0 && pair.right >= 0 &&
        SameText(derived[static_cast<std::size_t>(pair.left)], expected[static_cast<std::size_t>(pair.right)]);
    if (same) {
      ++slot;
      continue;
    }
    difference.found = true;
    difference.slot = slot;
    if (pair.left < 0) {
      difference.gap = true;
      difference.words = "no " + expected[static_cast<std::size_t>(pair.right)].text +
                         (slot == 0 ? " at the beginning" : " after " + derived[slot - 1].text);
    } else if (pair.right < 0) {
      difference.words = derived[slot].text + " too many";
    } else {
      difference.words = derived[slot].text + " for " + expected[static_cast<std::size_t>(pair.right)].text;
    }
    return difference;
  }
  difference.words = "in boundaries or marks only";
  return difference;
}

// The last rule that changed, inserted or (gap) deleted the segment, or -1. Positions count all slots, empty ones too.
int LastRuleToChange(const Grammar& grammar, const Walk& walk, Difference difference) {
  std::vector<Unit> later = UnitsOf(grammar, walk.forms.back(), true);
  std::size_t position = 0;
  for (std::size_t rooted = 0; position < later.size(); ++position) {
    if (!later[position].tree) continue;
    if (rooted++ == difference.slot) break;
  }
  for (std::size_t k = walk.applications.size(); k-- > 0;) {
    std::vector<Unit> before = UnitsOf(grammar, walk.forms[k], true);
    int cell = -1;                                     // where the segment stands in `before`
    std::size_t gap_from = 0, gap_to = before.size();  // for a gap: the stretch of `before` that fell into it
    bool right_seen = false;
    for (const Pairing& pair : Align(before, later, nullptr)) {
      if (pair.right == static_cast<int>(position) && !difference.gap) cell = pair.left;
      if (pair.left < 0 || pair.right < 0) continue;
      if (static_cast<std::size_t>(pair.right) < position) {
        gap_from = static_cast<std::size_t>(pair.left) + 1;
      } else if (!right_seen) {
        gap_to = static_cast<std::size_t>(pair.left);
        right_seen = true;
      }
    }
    if (difference.gap) {
      if (gap_to > gap_from) return static_cast<int>(k);
      position = gap_from;
    } else {
      if (cell < 0 || !(before[static_cast<std::size_t>(cell)] == later[position])) return static_cast<int>(k);
      position = static_cast<std::size_t>(cell);
    }
    later = std::move(before);
  }
  return -1;
}

// ---- explaining -----------------------------------------------------------------------------------------
class Checker {
 public:
  explicit Checker(const Grammar& grammar, Runner* runner)
      : grammar_(grammar), forms_(grammar), reader_(forms_.reader()), runner_(runner) {}

  CheckedRow CheckRow(const DataRow& row, CheckResult& result) {
    CheckedRow checked;
    TextError error;
    std::vector<Reading> readings;
    std::vector<std::string> texts = row.also;
    texts.insert(texts.begin(), row.underlying);
    for (const std::string& text : texts) {
      std::vector<Reading> some;
      if (!forms_.Read(text, row.tags, &some, &error)) {
        checked.unreadable = error;
        return checked;
      }
      readings.insert(readings.end(), some.begin(), some.end());
    }
    // The first reading that passes, else the first.
    std::vector<CheckedRow> all;
    for (const Reading& reading : readings) {
      all.push_back(CheckReading(row, reading));
      if (all.back().passed) break;
    }
    const std::size_t chosen = all.back().passed ? all.size() - 1 : 0;
    checked = std::move(all[chosen]);
    if (readings.size() > 1) checked.reading = grammar_.tagged ? Described(readings[chosen]) : readings[chosen].text;
    const Walk walk = Derivation(grammar_, forms_.FormOf(readings[chosen]));
    for (std::size_t k = 0; k < walk.applications.size(); ++k) {
      for (const auto& [reason, count] : walk.applications[k].blocked)
        result.blocked[static_cast<int>(k)][reason] += count;
    }
    if (!checked.passed) checked.explanation = Explain(row, walk, checked);
    return checked;
  }

 private:
  // All but the explanation; its problem, if there is no result.
  CheckedRow CheckReading(const DataRow& row, const Reading& reading) {
    CheckedRow checked;
    const Outputs outputs = OutputsOf(grammar_, forms_.FormOf(reading));
    if (!outputs.all.empty()) checked.derived = outputs.all.front().surface;
    if (!checked.derived) checked.explanation.problem = outputs.problem;
    checked.engines_differ = Disagreement(reading, outputs);
    Explanation& explanation = checked.explanation;
    std::optional<double> passes;
    for (const Runner::Output& output : outputs.all) {
      if (explanation.starred.empty() && IsOneOf(row, row.starred, output.surface)) {
        explanation.starred = output.surface;
        explanation.starred_probability = output.probability;
      }
      if (!passes && (row.surfaces.empty() || IsOneOf(row, row.surfaces, output.surface))) passes = output.probability;
    }
    checked.passed = passes && explanation.starred.empty() && checked.engines_differ.empty();
    if (checked.passed && !Expected(row, *checked.derived)) checked.less_likely = passes;
    return checked;
  }

  std::string Key(const DataRow& row, const std::string& surface) const {
    if (!row.comparing_length || grammar_.doubled.empty()) return ComparisonKey(surface, row.comparing_length);
    std::vector<Token> tokens;  // with `length doubled` tt and tː are two ways of writing one thing
    TextError error;
    const bool read = reader_.Read(surface, Reader::Side::kSurface, &tokens, &error);
    return ComparisonKey(read ? TextOf(grammar_, tokens) : surface, true);
  }
  bool IsOneOf(const DataRow& row, const std::vector<std::string>& forms, const std::string& surface) const {
    const std::string key = Key(row, surface);
    return std::any_of(forms.begin(), forms.end(), [&](const std::string& form) { return Key(row, form) == key; });
  }
  bool Expected(const DataRow& row, const std::string& surface) const {
    return (row.surfaces.empty() || IsOneOf(row, row.surfaces, surface)) && !IsOneOf(row, row.starred, surface);
  }

  // What the machine makes of it where that is not what the interpreter does; "" where they agree, or where the
  // interpreter has given up. The machine has no result if some way has none.
  std::string Disagreement(const Reading& reading, const Outputs& outputs) {
    if (runner_ == nullptr || outputs.too_many) return "";
    std::vector<Runner::Output> machine;
    TextError error;
    bool more = false;
    if (!runner_->DeriveAll(reading, Limits().outcomes, &machine, &more, &error))
      return outputs.problem.empty() ? "no result: " + error.message : "";
    if (outputs.problem.empty() && Agree(outputs.all, machine)) return "";
    std::string list;
    for (const Runner::Output& output : machine) {
      list += (list.empty() ? "" : ", ") + output.surface;
      if (machine.size() > 1) list += " " + std::to_string(output.probability);
    }
    return list;
  }

  // The same surfaces with the same probabilities; equally likely ones may stand in any order.
  static bool Agree(const std::vector<Runner::Output>& a, const std::vector<Runner::Output>& b) {
    constexpr double kRounding = 1e-6;
    return a.size() == b.size() && std::all_of(a.begin(), a.end(), [&](const Runner::Output& output) {
             return std::any_of(b.begin(), b.end(), [&](const Runner::Output& other) {
               return other.surface == output.surface && std::abs(other.probability - output.probability) < kRounding;
             });
           });
  }

  Explanation Explain(const DataRow& row, const Walk& walk, const CheckedRow& checked) {
    Explanation explanation = checked.explanation;
    explanation.expected_note = ExpectedNote(row);
    if (!explanation.problem.empty()) return explanation;
    if (!explanation.starred.empty() && Expected(row, *checked.derived)) {  // only a less likely form is wrong
      explanation.which = Explanation::Case::kNoRule;
      return explanation;
    }
    Difference difference;
    if (explanation.starred.empty() && !row.surfaces.empty()) difference = NearestDifference(row, walk.forms.back());
    explanation.difference = difference.words;
    const std::vector<int> mending = MendingRules(row, walk);
    if (!mending.empty()) {
      explanation.which = Explanation::Case::kOneRule;
      explanation.rule = mending.front();
      explanation.also.assign(mending.begin() + 1, mending.end());
    } else {
      explanation.rule = difference.found ? LastRuleToChange(grammar_, walk, difference) : -1;
      explanation.which = explanation.rule >= 0 ? Explanation::Case::kLastChange : Explanation::Case::kNoRule;
    }
    if (explanation.rule >= 0) {
      explanation.changes = walk.applications[static_cast<std::size_t>(explanation.rule)].notes.changes;
    } else {
      explanation.blocked = BlockedNotes(walk);
    }
    return explanation;
  }

  std::vector<int> MendingRules(const DataRow& row, const Walk& walk) const {
    std::vector<int> mending;
    for (std::size_t k = 0; k < walk.applications.size(); ++k) {
      if (Canonical(walk.forms[k]) == Canonical(walk.forms[k + 1])) continue;
      const std::optional<std::string> surface = Finish(grammar_, walk.forms[k], k + 1);
      if (surface && Expected(row, *surface)) mending.push_back(static_cast<int>(k));
    }
    return mending;
  }

  // Against the nearest of the row's surfaces.
  Difference NearestDifference(const DataRow& row, const Form& form) const {
    const std::vector<Unit> derived = UnitsOf(grammar_, form, false);
    std::vector<Unit> nearest;
    double least = -1;
    for (const std::string& surface : row.surfaces) {
      std::vector<Unit> expected = UnitsOfText(grammar_, reader_, surface);
      double cost = 0;
      Align(derived, expected, &cost);
      if (least >= 0 && cost >= least) continue;
      least = cost;
      nearest = std::move(expected);
    }
    return FirstDifference(derived, nearest);
  }

  std::string ExpectedNote(const DataRow& row) const {
    std::vector<Token> tokens;
    TextError error;
    for (const std::string& surface : row.surfaces) {
      if (!reader_.Read(surface, Reader::Side::kSurface, &tokens, &error)) return "[" + surface + "]: " + error.message;
    }
    return "";
  }

  std::vector<std::string> BlockedNotes(const Walk& walk) const {
    std::vector<std::string> notes;
    for (std::size_t k = 0; k < walk.applications.size(); ++k) {
      for (const std::string& note : walk.applications[k].notes.blocked) {
        notes.push_back(Quoted(grammar_.rules[k].name) + ": " + note);
      }
    }
    return notes;
  }

  const Grammar& grammar_;
  FormReader forms_;
  const Reader& reader_;
  Runner* runner_;
};

}  // namespace

CheckResult Check(const Grammar& grammar, const std::vector<DataRow>& rows, Runner* runner) {
  CheckResult result;
  Checker checker(grammar, runner);
  for (const DataRow& row : rows) {
    result.rows.push_back(checker.CheckRow(row, result));
    if (!result.rows.back().passed) ++result.failed;
    if (!result.rows.back().engines_differ.empty()) ++result.engines_differ;
  }
  return result;
}

std::string Describe(const Explanation& explanation, const Grammar& grammar) {
  const auto name = [&](int rule) { return Quoted(grammar.rules[static_cast<std::size_t>(rule)].name); };
  const bool starred = !explanation.starred.empty() && explanation.which != Explanation::Case::kOneRule;
  if (starred && explanation.starred_probability < 1)
    return fmt::format("[{}] must not come out, and does with probability {:.3g}", explanation.starred,
                       explanation.starred_probability);
  if (starred) return "[" + explanation.starred + "] must not come out; leaving out no single rule keeps it away";
  switch (explanation.which) {
    case Explanation::Case::kNoResult:
      return "no result: " + explanation.problem;
    case Explanation::Case::kOneRule: {
      std::string text = "first went wrong at rule " + name(explanation.rule) +
                         ": with this rule alone left out the expected form comes out";
      for (std::size_t i = 0; i < explanation.also.size(); ++i) {
        text += (i == 0 ? " (so it does without " : " or without ") + name(explanation.also[i]);
      }
      return explanation.also.empty() ? text : text + ")";
    }
    case Explanation::Case::kLastChange:
      return "went wrong at rule " + name(explanation.rule) +
             ", the last that changed the first segment that differs (" + explanation.difference +
             "); leaving out no single rule gives the expected form";
    case Explanation::Case::kNoRule:
      return "no rule changed the first segment that differs (" + explanation.difference +
             "): a rule is missing or did not apply";
  }
  return "";
}

}  // namespace tiersmith
