#include "support/agree.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <cstdlib>

#include "compile/cascade_data.h"
#include "graph/interpreter.h"
#include "run/run.h"
#include "support/generate.h"

namespace tiersmith::testing {
namespace {

std::string Failure(const Grammar& grammar, const Form& form, const std::string& what) {
  return what + "\n" + PrintCase(grammar, form);
}

// Sharing below the root is not part of what is spelled.
Form OnlyRootsShared(const Form& form) {
  Form result;
  std::map<InstanceId, InstanceId> roots;
  for (const FormItem& item : form.items) {
    FormItem copy = item;
    if (item.kind == FormItem::Kind::kSlot) {
      Instance slot;
      slot.node = kSlotNode;
      const std::int64_t root = RootOf(form, item);
      copy.instance = static_cast<InstanceId>(result.instances.size());
      result.instances.push_back(slot);
      if (root >= 0) {
        const auto found = roots.find(static_cast<InstanceId>(root));
        const InstanceId fresh =
            found != roots.end() ? found->second : AddContent(result, ContentOf(form, static_cast<InstanceId>(root)));
        roots.emplace(static_cast<InstanceId>(root), fresh);
        result.instances[copy.instance].daughters.push_back(fresh);
      }
    }
    result.items.push_back(copy);
  }
  return Canonical(result);
}

Form WithoutEmpty(const Form& form) {
  Form result = form;
  result.items.clear();
  for (const FormItem& item : form.items) {
    if (item.kind == FormItem::Kind::kSlot && RootOf(form, item) < 0) continue;
    result.items.push_back(item);
  }
  return Canonical(result);
}

std::string OutcomesText(const Grammar& grammar, const std::vector<std::pair<Form, double>>& outcomes) {
  std::string text;
  for (const auto& [form, probability] : outcomes)
    text += fmt::format("\n  {:.6f} {}", probability, Dump(form, grammar.tree));
  return text;
}

// The same forms with the same probabilities?
std::optional<std::string> Different(const Grammar& grammar, const Application& expected, const Runner::Answer& answer,
                                     Tally* tally) {
  std::vector<std::pair<Form, double>> outcomes;
  for (const Outcome& outcome : expected.outcomes) outcomes.emplace_back(outcome.form, outcome.probability);
  double sum = 0;
  bool same = outcomes.size() == answer.outcomes.size();
  for (const auto& [form, probability] : answer.outcomes) {
    sum += probability;
    const Form& wanted = form;
    const auto found =
        std::find_if(outcomes.begin(), outcomes.end(), [&](const auto& other) { return other.first == wanted; });
    same = same && found != outcomes.end() && std::abs(found->second - probability) < 1e-6;
  }
  tally->worst_sum = std::max(tally->worst_sum, std::abs(sum - 1));
  if (same) return std::nullopt;
  return fmt::format("interpreter: {}\nmachine:     {}", OutcomesText(grammar, outcomes),
                     OutcomesText(grammar, answer.outcomes));
}

}  // namespace

std::string Tally::Report() const {
  std::string text = fmt::format(
      "{} rule sets, {} pairs, {:.1f} % changed, {} ambiguous, {} reaching another root, {} over budget, {} forms not "
      "compilable\n",
      rules, pairs, 100 * ChangedShare(), ambiguous, reaching, over_budget, unsure);
  for (const auto& [shape, count] : applied) text += fmt::format("  {:<32} {:>10}\n", shape, count);
  return text;
}

std::uint64_t Tally::Applied(const std::string& operation, const std::string& mode) const {
  std::uint64_t sum = 0;
  for (const auto& [shape, count] : applied) {
    const std::size_t at = shape.size() - std::min(shape.size(), mode.size());
    if (shape.compare(at, std::string::npos, mode) == 0 && shape.find(operation) != std::string::npos) sum += count;
  }
  return sum;
}

std::uint64_t SeedOr(std::uint64_t seed) {
  const char* given = std::getenv("TIERSMITH_SEED");
  return given == nullptr ? seed : std::strtoull(given, nullptr, 10);
}

std::optional<std::string> CompareRule(const Grammar& grammar, const std::vector<Form>& forms, std::size_t least,
                                       Tally* tally) {
  std::vector<Letter> letters;
  for (const Form& form : forms) {
    for (Letter& letter : Encode(form, grammar.tree)) letters.push_back(std::move(letter));
  }
  Diagnostics diagnostics;
  const Limits limits;
  const std::unique_ptr<Cascade> cascade = CompileForTesting(grammar, letters, limits, diagnostics);
  if (cascade == nullptr && !diagnostics.all().empty() && diagnostics.all()[0].kind == Kind::kLimit) {
    ++tally->over_budget;
    return std::nullopt;
  }
  if (cascade == nullptr) {
    return Failure(grammar, forms.front(),
                   "does not compile: " + (diagnostics.all().empty() ? "" : diagnostics.all()[0].message));
  }
  Runner runner(grammar, *cascade);
  ++tally->rules;
  std::size_t changed = 0, same = 0;
  for (const Form& form : forms) {
    const Application expected = ApplyRule(grammar, grammar.rules[0], form);
    const bool refused = !expected.ambiguous.empty() || !expected.reaches.empty();
    if (!expected.too_many.empty()) {
      ++tally->too_many;
      continue;
    }
    const bool changes = !refused && (expected.outcomes.size() > 1 || !(expected.form == form));
    if (!changes && !refused && same >= std::max(changed, least)) continue;
    const Runner::Answer answer = runner.Apply(form);
    // A conflict on a mother that several slots hold is not told by `prefer` in the machine: users get the error of ambiguity.
    const bool undecided = answer.ambiguous && !refused && grammar.rules[0].prefer != Rule::Prefer::kNone;
    if (answer.unsure || undecided) {  // users get an error for a grammar that comes here
      ++tally->unsure;
      continue;
    }
    ++tally->pairs;
    for (const auto& [reason, count] : expected.blocked) tally->blocked[reason] += static_cast<std::uint64_t>(count);
    if (refused) {
      tally->ambiguous += !expected.ambiguous.empty();
      tally->reaching += expected.ambiguous.empty();
      if (!answer.ambiguous && !answer.reaches) {
        return Failure(grammar, form,
                       "the interpreter refuses (" + expected.ambiguous + expected.reaches + "), the machine does not");
      }
      continue;
    }
    changes ? ++changed : ++same;
    tally->changed += changes;
    if (answer.ambiguous || answer.reaches) {
      return Failure(grammar, form,
                     answer.ambiguous ? "the machine says ambiguous, the interpreter does not"
                                      : "the machine says it reaches another root, the interpreter does not");
    }
    if (!answer.form.has_value()) return Failure(grammar, form, "the machine has no (well-formed) answer");
    const std::optional<std::string> different = Different(grammar, expected, answer, tally);
    if (different.has_value()) return Failure(grammar, form, *different);
  }
  tally->applied[ShapeOf(grammar.rules[0])] += changed;
  return std::nullopt;
}

std::optional<std::string> CompareGrammar(const Grammar& grammar, const std::vector<Form>& forms, Tally* tally,
                                          bool* compiled) {
  Diagnostics diagnostics;
  Limits limits;
  if (tally->rules % 2 == 1) limits.joined_states = 1;  // a segment for each rule
  const std::unique_ptr<Cascade> cascade = Compile(grammar, limits, diagnostics);
  *compiled = cascade != nullptr;
  if (cascade == nullptr) return std::nullopt;
  Runner runner(grammar, *cascade);
  ++tally->rules;
  std::map<std::string, std::uint64_t> applied;
  for (const Form& form : forms) {
    const Derivation expected = Derive(grammar, form);
    ++tally->pairs;
    if (!expected.problem.empty()) {
      return Failure(grammar, form, "it compiled, but the interpreter refuses: " + expected.problem);
    }
    const Form* before = &form;
    for (const Step& step : expected.steps) {
      if (!(step.after == *before)) ++tally->applied[ShapeOf(grammar.rules[step.rule])];
      before = &step.after;
    }
    const Form surface = OnlyRootsShared(expected.surface);
    tally->changed += !(surface == form);
    const Runner::Answer answer = runner.Apply(form);
    if (!answer.form.has_value()) return Failure(grammar, form, "the machine has no (well-formed) answer");
    const Form machine = OnlyRootsShared(WithoutEmpty(*answer.form));
    if (!(machine == surface)) {
      return Failure(
          grammar, form,
          fmt::format("interpreter: {}\nmachine:     {}", Dump(surface, grammar.tree), Dump(machine, grammar.tree)));
    }
  }
  return std::nullopt;
}

}  // namespace tiersmith::testing
