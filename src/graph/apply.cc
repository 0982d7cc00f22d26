// One application of a rule, at once or in a sweep.
//
// Ways of matching are found by trying (matching.h), each match is judged alone on the form before (matches.h), and
// what stands is carried out together (requests.h). With `delink N.Place spread C.Place to N` on /anpa/:
// one match, n's Place cut and p's Place drawn to n, /ampa/ with one Place under two roots.
// An iterative rule does the same at each root in turn, on the form as the sweep has left it. An optional rule comes
// out in a way for each draw at each site: with `optional 0.3` on two sites, both 0.09, one 0.21 each, none 0.49.
// Not here: cyclic application, prosody.
// Tested by tests/unit/graph/, and against the compiler by tests/agreement/.
#include "graph/apply.h"

#include <algorithm>
#include <cmath>
#include <memory>
#include <numeric>
#include <unordered_map>

#include "base/limits.h"
#include "graph/matches.h"
#include "graph/notes.h"
#include "graph/requests.h"

namespace tiersmith::graph {
namespace {

using Indices = std::vector<std::size_t>;

class Run {
 public:
  Run(const Grammar& grammar, const Rule& rule, const Form& form, bool notes)
      : grammar_(grammar),
        rule_(rule),
        form_(form),
        notes_(notes),
        start_{Graph(form, grammar.tree), 0, 1, {}, 0, {}, {}} {}

  Results AtOnce() {
    const View view(grammar_, start_.graph);
    Matches matches(view, rule_);
    Indices all(matches.size());
    std::iota(all.begin(), all.end(), 0);
    const Indices standing = Standing(view, matches, all, &start_);
    if (rule_.probability < 1) {
      DrawAtEachSite(view, matches, standing);
    } else {
      Carry(view, matches, standing, nullptr, &start_);
      End(std::move(start_));
    }
    return Finished();
  }

  Results Sweep(bool rightward) {
    const std::vector<Visit> visits = Visits(rightward);
    open_.push_back(std::move(start_));
    while (!open_.empty() && !results_.HasProblem()) {
      Branch branch = std::move(open_.back());
      open_.pop_back();
      GoOn(visits, &branch);
      End(std::move(branch));
    }
    return Finished();
  }

 private:
  // How far one way of applying has come.
  struct Branch {
    Graph graph;
    std::size_t next = 0;  // visit
    double probability = 1;
    std::vector<std::pair<int, bool>> words;  // drawn for already
    int changed = 0;
    std::map<std::string, int> blocked;
    StepNotes notes;
  };
  // A root with its slots, or one slot without a root.
  struct Visit {
    InstanceId root = kNone;
    InstanceId slot = kNone;
  };

  // ---- at once ------------------------------------------------------------------------------------

  void DrawAtEachSite(const View& view, const Matches& matches, const Indices& standing) {
    Indices always;
    std::vector<Indices> drawn;
    for (Indices& site : Sites(view, matches, standing)) {
      Requests requests(view);
      for (std::size_t i : site) requests.Add(matches[i]);
      if (requests.Changes()) {
        drawn.push_back(std::move(site));
      } else {
        always.insert(always.end(), site.begin(), site.end());
      }
    }
    if (drawn.size() > 30 || (std::size_t{1} << drawn.size()) > Limits().outcomes) {
      SayTooMany();
      return;
    }
    // First where all apply, last where none does; the sites on the left apply longest.
    for (std::size_t left_out = 0; left_out < (std::size_t{1} << drawn.size()); ++left_out) {
      Branch branch = start_;
      Indices applying = always;
      for (std::size_t site = 0; site < drawn.size(); ++site) {
        const bool applies = ((left_out >> (drawn.size() - 1 - site)) & 1) == 0;
        branch.probability *= applies ? rule_.probability : 1 - rule_.probability;
        if (applies) applying.insert(applying.end(), drawn[site].begin(), drawn[site].end());
      }
      Carry(view, matches, applying, nullptr, &branch);
      if (results_.HasProblem()) return;
      End(std::move(branch));
    }
  }

  // Matches linked by a common change; `by word`, all of one word.
  std::vector<Indices> Sites(const View& view, const Matches& matches, const Indices& standing) const {
    Requests all(view);
    std::unordered_map<int, std::size_t> site_of_request, site_of_word;
    std::vector<Indices> sites;
    const auto join = [&](std::size_t from, std::size_t to) {
      if (from == to) return;
      sites[to].insert(sites[to].end(), sites[from].begin(), sites[from].end());
      sites[from].clear();
      for (auto* table : {&site_of_request, &site_of_word}) {
        for (auto& entry : *table) entry.second = entry.second == from ? to : entry.second;
      }
    };
    for (std::size_t i : standing) {
      std::size_t mine = sites.size();
      sites.push_back({i});
      std::vector<int> asked;
      all.Add(matches[i], &asked);
      const auto link = [&](std::unordered_map<int, std::size_t>* table, int key) {
        const auto [known, fresh] = table->insert({key, mine});
        if (fresh) return;
        const std::size_t theirs = known->second;
        join(mine, theirs);
        mine = theirs;
      };
      for (int request : asked) link(&site_of_request, request);
      if (rule_.by_word) link(&site_of_word, WordOf(view, matches.FirstSlot(i)));
    }
    sites.erase(std::remove_if(sites.begin(), sites.end(), [](const Indices& site) { return site.empty(); }),
                sites.end());
    return sites;
  }

  // What one draw `by word` is for: the phrase, if the rule is within it.
  int WordOf(const View& view, int slot) const {
    return view.StretchOf(slot, rule_.within == Domain::kPhrase ? Boundary::kPhrase : Boundary::kWord);
  }

  // ---- in a sweep ---------------------------------------------------------------------------------

  std::vector<Visit> Visits(bool rightward) const {
    std::vector<Visit> visits;
    const Graph& graph = start_.graph;
    const auto add = [&](const FormItem& item) {
      if (item.kind != FormItem::Kind::kSlot) return;
      const InstanceId root = graph.FindUnder(item.instance, kRootNode);
      const bool known = root != kNone && std::any_of(visits.begin(), visits.end(),
                                                      [&](const Visit& visit) { return visit.root == root; });
      if (!known) visits.push_back({root, item.instance});
    };
    if (rightward) {
      std::for_each(graph.items.begin(), graph.items.end(), add);
    } else {
      std::for_each(graph.items.rbegin(), graph.items.rend(), add);
    }
    return visits;
  }

  void GoOn(const std::vector<Visit>& visits, Branch* branch) {
    std::unique_ptr<View> view;        // of the form as it is now
    std::unique_ptr<Matches> matches;  // on it
    while (branch->next < visits.size() && !results_.HasProblem()) {
      const Visit& visit = visits[branch->next++];
      if (view == nullptr) {
        view = std::make_unique<View>(grammar_, branch->graph);
        matches = std::make_unique<Matches>(*view, rule_);
      }
      if (matches->size() == 0) break;  // and so it will stay
      Indices here;
      for (std::size_t i = 0; i < matches->size(); ++i) {
        if (IsAt(*view, (*matches)[i], visit)) here.push_back(i);
      }
      if (here.empty()) continue;
      const Indices standing = Standing(*view, *matches, here, branch);
      if (rule_.probability < 1 && !Drawn(*view, *matches, standing, visit, branch)) continue;
      if (Carry(*view, *matches, standing, &visit, branch)) {
        matches.reset();
        view.reset();
      }
    }
  }

  // Does the rule apply at this visit? If that is to be drawn, it does, and another branch goes on where it does not.
  bool Drawn(const View& view, const Matches& matches, const Indices& standing, const Visit& visit, Branch* branch) {
    Requests requests(view);
    for (std::size_t i : standing) requests.Add(matches[i]);
    if (!requests.Changes()) return false;
    int word = 0;
    if (rule_.by_word) {
      word = WordOf(view, FirstMet(view, visit));
      for (const auto& [known, applies] : branch->words) {
        if (known == word) return applies;
      }
    }
    Branch other = *branch;
    branch->probability *= rule_.probability;
    other.probability *= 1 - rule_.probability;
    branch->words.push_back({word, true});
    other.words.push_back({word, false});
    open_.push_back(std::move(other));
    if (open_.size() + results_.results.size() >= Limits().outcomes) SayTooMany();
    return true;
  }

  // The slot of a visit that the sweep meets first.
  int FirstMet(const View& view, const Visit& visit) const {
    int met = -1;
    for (int slot = 0; slot < view.size(); ++slot) {
      const bool here = visit.root == kNone ? view.slot(slot) == visit.slot : view.root(slot) == visit.root;
      if (here && (met < 0 || rule_.mode == Rule::Mode::kLeftward)) met = slot;
    }
    return met;
  }

  // The one label that an iterative rule changes.
  static int VisitedLabel(const Clause& clause) {
    for (int label : ChangedLabels(clause)) {
      if (clause.KindOf(label) == Clause::LabelKind::kSlot) return label;
    }
    return -1;
  }

  static bool IsAt(const View& view, const Match& match, const Visit& visit) {
    const int label = VisitedLabel(*match.clause);
    const int slot = label < 0 ? -1 : match.labels[label];
    if (slot < 0) return false;
    return visit.root == kNone ? view.slot(slot) == visit.slot : view.root(slot) == visit.root;
  }

  // Another root that holds, directly or from above, a mother that something happens to.
  std::string Reached(const View& view, const Requests& requests, const Visit& visit) const {
    for (InstanceId mother : requests.MothersChanged()) {
      for (int slot = 0; slot < view.size(); ++slot) {
        const InstanceId root = view.root(slot);
        if (root == kNone || root == visit.root) continue;
        if (view.graph().Holds(root, mother)) {
          return "the change reaches " + NameOfSlot(view, slot) + ", which shares " +
                 grammar_.tree[view.graph()[mother].node].name;
        }
      }
    }
    return "";
  }

  // ---- both ---------------------------------------------------------------------------------------

  Indices Standing(const View& view, Matches& matches, const Indices& among, Branch* branch) const {
    return matches.Standing(among, [&](std::size_t i, Failure failure) {
      ++branch->blocked[NameOf(failure)];
      if (notes_) NoteBlocked(view, matches[i], failure, &branch->notes);
    });
  }

  // Carries out the matches together. True if the form changed.
  bool Carry(const View& view, const Matches& matches, const Indices& applying, const Visit* visit, Branch* branch) {
    Requests requests(view);
    int changing = 0;
    for (std::size_t i : applying) {
      requests.Add(matches[i]);
      changing += matches.Changes(i) ? 1 : 0;
    }
    // One may undo another: what one match cuts, another may ask for.
    if (changing == 0 || !requests.Changes()) return false;
    branch->changed += changing;
    for (std::size_t i : applying) {
      if (notes_ && matches.Changes(i)) NoteChanges(view, matches[i], &branch->notes);
    }
    results_.ambiguous = requests.Ambiguity();
    if (visit != nullptr) results_.reaches = Reached(view, requests, *visit);
    if (results_.HasProblem()) return false;
    Graph after = requests.Result();
    branch->graph = std::move(after);
    return true;
  }

  void End(Branch branch) {
    if (branch.probability <= 0) return;
    results_.results.push_back({branch.graph.ToForm(), branch.probability, branch.probability, 0, branch.changed,
                                std::move(branch.blocked), std::move(branch.notes)});
  }

  void SayTooMany() {
    results_.too_many = "it is optional and may come out in more than " + std::to_string(Limits().outcomes) + " ways";
  }

  Results Finished() {
    if (results_.HasProblem()) {
      results_.results.resize(1);
      Result& result = results_.results.front();
      result.form = form_;
      result.probability = result.likeliest = 1;
      result.changed = 0;
    } else if (results_.results.size() > 1) {
      SumEqualForms(&results_.results);
    }
    return std::move(results_);
  }

  const Grammar& grammar_;
  const Rule& rule_;
  const Form& form_;
  const bool notes_;
  Branch start_;
  std::vector<Branch> open_;
  Results results_;
};

std::size_t HashOf(const Form& form) {
  std::size_t hash = form.items.size();
  const auto mix = [&](std::size_t part) { hash = hash * 1099511628211u + part + 1; };
  for (const Instance& instance : form.instances) {
    mix(instance.node);
    mix(instance.value);
    for (InstanceId daughter : instance.daughters) mix(daughter);
  }
  for (const FormItem& item : form.items) mix(static_cast<std::size_t>(item.boundary));
  return hash;
}

}  // namespace

void SumEqualForms(std::vector<Result>* results) {
  std::unordered_multimap<std::size_t, std::size_t> known;
  std::vector<Result> sums;
  for (Result& result : *results) {
    const std::size_t hash = HashOf(result.form);
    const auto [begin, end] = known.equal_range(hash);
    const auto same =
        std::find_if(begin, end, [&](const auto& entry) { return sums[entry.second].form == result.form; });
    if (same == end) {
      known.insert({hash, sums.size()});
      sums.push_back(std::move(result));
      continue;
    }
    Result& sum = sums[same->second];
    const double probability = sum.probability + result.probability;
    if (result.likeliest > sum.likeliest) sum = std::move(result);
    sum.probability = probability;
  }
  // Sums of the same products in another order differ in their last digits.
  const auto rounded = [](double probability) { return std::llround(probability * 1e12); };
  std::stable_sort(sums.begin(), sums.end(),
                   [&](const Result& a, const Result& b) { return rounded(a.probability) > rounded(b.probability); });
  *results = std::move(sums);
}

Results ApplyAllWays(const Grammar& grammar, const Rule& rule, const Form& form, bool notes) {
  if (rule.kind == Rule::Kind::kComplete) {
    Results results;
    results.results.push_back(Completed(grammar, form, notes));
    return results;
  }
  Run run(grammar, rule, form, notes);
  switch (rule.mode) {
    case Rule::Mode::kAtOnce:
      return run.AtOnce();
    case Rule::Mode::kRightward:
      return run.Sweep(true);
    case Rule::Mode::kLeftward:
      return run.Sweep(false);
  }
  return {};
}

}  // namespace tiersmith::graph
