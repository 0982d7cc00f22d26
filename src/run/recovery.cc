#include "run/recovery.h"

#include <fmt/format.h>
#include <fst/arcsort.h>
#include <fst/compose.h>
#include <fst/connect.h>
#include <fst/flags.h>
#include <fst/invert.h>
#include <fst/project.h>
#include <fst/rmepsilon.h>
#include <fst/shortest-path.h>
#include <fst/vector-fst.h>

#include <algorithm>
#include <cmath>
#include <map>
#include <set>
#include <tuple>

#include "base/limits.h"
#include "compile/cascade_data.h"
#include "run/input_letters.h"
#include "run/lattice.h"

DECLARE_bool(fst_error_fatal);

namespace tiersmith {
namespace {

using Fst = fst::VectorFst<fst::StdArc>;
using fst::StdArc;
const fst::TropicalWeight kFree = fst::TropicalWeight::One();
const fst::TropicalWeight kRestored(1.0F);

// Letters with their rests, numbered from 1 (0 is epsilon).
class RealLetters {
 public:
  int Id(int class_id, int rest) {
    const auto [it, added] = ids_.emplace(std::make_pair(class_id, rest), static_cast<int>(parts_.size()) + 1);
    if (added) parts_.push_back({class_id, rest});
    return it->second;
  }
  // 0: there is no such letter.
  int Find(const LetterClasses::Parts& parts) const {
    const auto found = ids_.find({parts.class_id, parts.rest});
    return found == ids_.end() ? 0 : found->second;
  }
  const LetterClasses::Parts& operator[](int id) const { return parts_[id - 1]; }
  int size() const { return static_cast<int>(parts_.size()); }

 private:
  std::map<std::pair<int, int>, int> ids_;
  std::vector<LetterClasses::Parts> parts_;
};

// What a letter is to the reader of a form.
struct LetterFacts {
  bool slot = false;   // a slot with a root
  bool empty = false;  // a slot without one
  bool linked = false;
  int symbol = -1;  // that spells it
  Boundary boundary = Boundary::kNone;
};

// A word graph letter by letter. `machine` shares the beginnings of pieces; from where a piece is whole an arc without a letter
// leads on.
class Words {
 public:
  // Adds a piece; in the place of its first letter each of `others` may stand.
  void Add(const WordGraph::Arc& arc, const std::string& gloss, const std::vector<int>& ids,
           const std::vector<fst::TropicalWeight>& costs, const std::vector<int>& others) {
    int at = Node(arc.from);
    for (std::size_t i = 0; i < ids.size(); ++i) {
      const auto [it, added] = begun_.emplace(std::make_pair(at, ids[i]), machine_.NumStates());
      const int next = it->second;
      if (added) {
        machine_.AddState();
        machine_.AddArc(at, StdArc(ids[i], ids[i], costs[i], next));
        for (int other : i == 0 ? others : std::vector<int>{}) {
          begun_.emplace(std::make_pair(at, other), next);
          machine_.AddArc(at, StdArc(other, other, costs[i], next));
        }
      }
      at = next;
    }
    whole_[at].insert({Node(arc.to), gloss});
  }

  void Finish(const WordGraph& words) {
    machine_.SetStart(Node(0));
    for (const auto& [state, pieces] : whole_) {
      int last = fst::kNoStateId;
      for (const auto& [to, gloss] : pieces) {
        if (to != last) machine_.AddArc(state, StdArc(0, 0, kFree, to));
        last = to;
      }
    }
    for (int end : words.ends) {
      machine_.SetFinal(Node(end), kFree);
      machine_.AddArc(Node(end), StdArc(0, 0, kFree, Node(words.again)));
      ends_.emplace(Node(end), Node(words.again));
    }
  }

  Fst Acceptor() const {
    Fst result = machine_;
    fst::ArcSort(&result, fst::ILabelCompare<StdArc>());
    return result;
  }

  // "rope PL LOC"; words parted by #, different analyses by /.
  std::string GlossOf(const std::vector<int>& ids) const {
    std::set<std::string> glosses;
    Gloss(ids, 0, machine_.Start(), "", &glosses);
    std::string all;
    for (const std::string& gloss : glosses) all += (all.empty() || gloss.empty() ? "" : " / ") + gloss;
    return all;
  }

 private:
  int Node(int node) {
    const auto [it, added] = nodes_.emplace(node, machine_.NumStates());
    if (added) machine_.AddState();
    return it->second;
  }

  void Gloss(const std::vector<int>& ids, std::size_t i, int at, const std::string& gloss,
             std::set<std::string>* glosses) const {
    const auto end = ends_.find(at);
    if (end != ends_.end()) {
      if (i == ids.size()) glosses->insert(gloss);
      Gloss(ids, i, end->second, gloss + (gloss.empty() ? "#" : " #"), glosses);
    }
    const auto pieces = whole_.find(at);
    if (pieces != whole_.end()) {
      for (const auto& [to, more] : pieces->second)
        Gloss(ids, i, to, gloss + (gloss.empty() || more.empty() ? "" : " ") + more, glosses);
    }
    if (i == ids.size()) return;
    const auto next = begun_.find({at, ids[i]});
    if (next != begun_.end()) Gloss(ids, i + 1, next->second, gloss, glosses);
  }

  Fst machine_;
  std::map<int, int> nodes_;                  // of the graph -> state
  std::map<std::pair<int, int>, int> begun_;  // state, letter -> state
  std::map<int, std::set<std::pair<int, std::string>>>
      whole_;                // state -> where the pieces that end here lead, their glosses
  std::map<int, int> ends_;  // state where a word ends -> where the next begins
};

// The arcs of an acceptor without choice, and its one end.
std::map<std::pair<int, int>, int> ArcsOf(const Fst& acceptor, int* end) {
  std::map<std::pair<int, int>, int> arcs;
  for (int s = 0; s < acceptor.NumStates(); ++s) {
    if (acceptor.Final(s) != fst::TropicalWeight::Zero()) *end = s;
    for (fst::ArcIterator<Fst> it(acceptor, s); !it.Done(); it.Next())
      arcs.emplace(std::make_pair(s, it.Value().ilabel), it.Value().nextstate);
  }
  return arcs;
}

}  // namespace

struct Recovery::Impl {
  const Grammar& grammar;
  const CascadeData& data;
  const InputLetters inputs;
  RealLetters letters;
  std::vector<LetterFacts> facts;       // by letter id - 1
  std::vector<std::set<int>> entering;  // by segment: letters that may come in
  std::vector<std::set<int>> leaving;
  std::vector<Fst> inverted;     // by segment: from what it writes to what it reads
  Fst underlying;                // acceptor of underlying forms, boundaries costing 1
  Fst allowed;                   // the same, or of words
  std::unique_ptr<Words> words;  // where only words are allowed
  bool weighted = false;
  LetterNumbers numbers;
  std::map<int, const InputLetter*> input_of;  // by letter id
  std::map<int, std::vector<int>> spelled_by;  // symbol -> letters that leave the last segment

  Impl(const Grammar& g, const CascadeData& d) : grammar(g), data(d), inputs(d) {
    for (const Rule& rule : g.rules) weighted = weighted || rule.probability < 1;
    FLAGS_fst_error_fatal = false;
    std::set<int> coming;
    for (const InputLetter& input : data.inputs) {
      const int id = letters.Id(input.parts.class_id, input.parts.rest);
      input_of.emplace(id, &input);
      coming.insert(id);
    }
    for (const Segment& segment : data.segments) {
      entering.push_back(coming);
      inverted.push_back(Expand(segment, coming));
      coming = written_;
      leaving.push_back(coming);
    }
    for (int id = 1; id <= letters.size(); ++id) facts.push_back(FactsOf(letters[id]));
    for (int id : leaving.back()) {
      if (facts[id - 1].symbol >= 0) spelled_by[facts[id - 1].symbol].push_back(id);
    }
    underlying = UnderlyingForms();
    allowed = underlying;
  }

  LetterFacts FactsOf(const LetterClasses::Parts& parts) const {
    LetterFacts fact;
    const Letter letter = data.classes->Join(parts.class_id, parts.rest);
    fact.boundary = letter.boundary;
    if (letter.kind != FormItem::Kind::kSlot) return fact;
    const std::optional<FeatureTree> root = RootContent(letter);
    fact.slot = root.has_value();
    fact.empty = !fact.slot;
    fact.linked = RootGoesOn(letter, grammar.tree);
    if (fact.slot) fact.symbol = grammar.inventory.Spell(*root).symbol;
    return fact;
  }

  // A segment over whole letters, inverted. A letter read of which nothing is written is a restored one.
  Fst Expand(const Segment& segment, const std::set<int>& coming) {
    std::map<int, std::vector<int>> by_class;
    for (int id : coming) by_class[letters[id].class_id].push_back(id);
    written_.clear();
    Fst result;
    for (std::size_t s = 0; s < segment.machine.arcs.size(); ++s) {
      result.AddState();
      if (segment.machine.ends[s]) result.SetFinal(static_cast<int>(s), kFree);
    }
    const int start = result.AddState();
    result.SetStart(start);
    for (int s : segment.machine.starts) result.AddArc(start, StdArc(0, 0, kFree, s));
    for (std::size_t s = 0; s < segment.machine.arcs.size(); ++s) {
      for (const TapeArc& arc : segment.machine.arcs[s]) {
        for (int in : by_class[arc.in])
          AddWritten(&result, static_cast<int>(s), in, segment.machine.symbols[arc.out], arc.next);
      }
    }
    fst::ArcSort(&result, fst::ILabelCompare<StdArc>());
    return result;
  }

  void AddWritten(Fst* result, int from, int in, const Key& string, int to) {
    const std::size_t count = (string.size() - 1) / 2;
    bool rides = false;
    for (std::size_t k = 0; k < count; ++k) rides = rides || string[2 + 2 * k] < 0;
    const bool slot = data.classes->Join(letters[in].class_id, letters[in].rest).kind == FormItem::Kind::kSlot;
    const fst::TropicalWeight weight = !rides && slot ? kRestored : kFree;
    if (count == 0) {
      result->AddArc(from, StdArc(0, in, weight, to));
      return;
    }
    for (std::size_t k = 0; k < count; ++k) {
      const int rest = string[2 + 2 * k];
      const int id = letters.Id(string[1 + 2 * k], rest < 0 ? letters[in].rest : rest);
      written_.insert(id);
      const int next = k + 1 == count ? to : result->AddState();
      result->AddArc(from, StdArc(id, k == 0 ? in : 0, k == 0 ? weight : kFree, next));
      from = next;
    }
  }

  // A tag is restored as a boundary is; a kind is no more than a reading.
  static fst::TropicalWeight TagCost(std::uint64_t tags) {
    fst::TropicalWeight cost = kFree;
    for (std::uint64_t rest = tags >> 4; rest != 0; rest &= rest - 1) cost = fst::Times(cost, kRestored);
    return cost;
  }

  // States: may a boundary come next or not, and for each long letter the wait for its other half.
  Fst UnderlyingForms() const {
    Fst result;
    const int open = result.AddState();     // at the start or after a slot
    const int bounded = result.AddState();  // after a boundary
    if (grammar.tagged) {
      result.SetStart(result.AddState());  // before the ‖ that opens the first morpheme
      for (const auto& [id, input] : input_of) {
        if (input->boundary == Boundary::kPhrase)
          result.AddArc(result.Start(), StdArc(id, id, TagCost(input->tags), open));
      }
    } else {
      result.SetStart(open);
    }
    result.SetFinal(open, kFree);
    result.SetFinal(bounded, kFree);
    std::map<int, int> waiting;  // symbol -> state
    for (const auto& [id, input] : input_of) {
      if (input->symbol >= 0 && input->linked) waiting.emplace(input->symbol, result.AddState());
    }
    for (const auto& [id, input] : input_of) {  // a letter is written by one symbol: no two symbols fall together
      if (input->symbol < 0) {
        result.AddArc(open, StdArc(id, id, fst::Times(kRestored, TagCost(input->tags)), bounded));
        continue;
      }
      const int next = input->linked ? waiting[input->symbol] : open;
      result.AddArc(open, StdArc(id, id, kFree, next));
      result.AddArc(bounded, StdArc(id, id, kFree, next));
      if (waiting.count(input->symbol) > 0) result.AddArc(waiting[input->symbol], StdArc(id, id, kFree, next));
    }
    fst::ArcSort(&result, fst::ILabelCompare<StdArc>());
    return result;
  }

  void AllowOnly(const WordGraph& graph, std::vector<std::string>* left_out) {
    words = std::make_unique<Words>();
    std::vector<std::optional<std::vector<int>>> pieces;  // none: it has letters that the cascade does not read
    std::vector<LetterClasses::Parts> piece_letters;
    for (const WordGraph::Piece& piece : graph.pieces) {
      pieces.emplace_back();
      if (inputs.Of(piece.form, &piece_letters) != InputLetters::Missing::kNothing) {
        left_out->push_back(piece.form.text);
        continue;
      }
      pieces.back().emplace();
      for (const LetterClasses::Parts& letter : piece_letters) pieces.back()->push_back(letters.Find(letter));
    }
    for (const WordGraph::Arc& arc : graph.arcs) {
      if (pieces[arc.piece]) AddPiece(graph, arc, *pieces[arc.piece]);
    }
    words->Finish(graph);
    allowed = words->Acceptor();
  }

  // A piece behind its boundary, if it does not go on. Where rules ask for tags it begins with a ‖ that bears those of its first morpheme, and
  // that one becomes the boundary.
  void AddPiece(const WordGraph& graph, const WordGraph::Arc& arc, std::vector<int> ids) {
    std::vector<int> others;  // that may stand in the place of the first
    const bool goes_on = graph.pieces[arc.piece].goes_on;
    if (goes_on && grammar.tagged) ids.erase(ids.begin());
    if (arc.behind != Boundary::kNone) {
      const std::uint64_t tags = grammar.tagged ? input_of.at(ids.front())->tags : 0;
      if (!grammar.tagged) ids.insert(ids.begin(), 0);
      ids.front() = BoundaryLetter(arc.behind, tags);
      if (arc.from == graph.again) others.push_back(BoundaryLetter(Boundary::kPhrase, tags));
    }
    std::vector<fst::TropicalWeight> costs;
    for (int id : ids) costs.push_back(input_of.at(id)->symbol < 0 ? kRestored : kFree);
    if (grammar.tagged && !goes_on && arc.behind == Boundary::kNone) costs.front() = kFree;
    words->Add(arc, graph.pieces[arc.piece].gloss, ids, costs, others);
  }

  // The cascade reads every boundary with every set of tags that it reads.
  int BoundaryLetter(Boundary boundary, std::uint64_t tags) const {
    return letters.Find(*inputs.Bound(boundary, tags));
  }

  // All strings of letters that are written so.
  Fst SurfaceForms(const std::vector<Token>& surface) const {
    Fst result;
    int state = result.AddState();
    result.SetStart(state);
    if (grammar.tagged) {  // the ‖ that opens the first morpheme is not written
      const int opened = result.AddState();
      for (int id : leaving.back()) {
        if (facts[id - 1].boundary == Boundary::kPhrase) result.AddArc(state, StdArc(id, id, kFree, opened));
      }
      state = opened;
    }
    AddUnwritten(&result, state);
    for (std::size_t i = 0; i < surface.size(); ++i) {
      const int symbol = SymbolAt(surface, i);
      const bool may_link = symbol >= 0 && i + 1 < surface.size() && SymbolAt(surface, i + 1) == symbol;
      // After a linked letter only its other half may come, so the two ways go apart for one letter.
      const int next = result.AddState();
      if (symbol < 0) {
        for (int id : leaving.back()) {
          if (facts[id - 1].boundary == surface[i].boundary) result.AddArc(state, StdArc(id, id, kFree, next));
        }
      } else {
        const auto found = spelled_by.find(symbol);
        if (found != spelled_by.end()) {
          for (int id : found->second) {
            if (!facts[id - 1].linked || may_link) result.AddArc(state, StdArc(id, id, kFree, next));
          }
        }
      }
      state = next;
      AddUnwritten(&result, state);
    }
    result.SetFinal(state, kFree);
    fst::ArcSort(&result, fst::OLabelCompare<StdArc>());
    return result;
  }

  static int SymbolAt(const std::vector<Token>& surface, std::size_t i) {
    while (surface[i].kind == Token::Kind::kLength && i > 0) --i;
    return surface[i].kind == Token::Kind::kSymbol ? surface[i].symbol : -1;
  }

  void AddUnwritten(Fst* result, int state) const {
    for (int id : leaving.back()) {
      const LetterFacts& fact = facts[id - 1];
      const bool unwritten = fact.empty || fact.boundary == Boundary::kMorpheme || fact.boundary == Boundary::kClitic;
      if (unwritten) result->AddArc(state, StdArc(id, id, kFree, state));
    }
  }

  // Acceptor of the underlying forms, among those, of a surface form.
  Fst Candidates(Fst at, const Fst& among) const {
    for (std::size_t k = inverted.size(); k-- > 0;) {
      Fst next;
      fst::Compose(at, inverted[k], &next);
      fst::Project(&next, fst::ProjectType::OUTPUT);
      fst::Connect(&next);
      fst::ArcSort(&next, fst::OLabelCompare<StdArc>());
      at = std::move(next);
    }
    Fst result;
    fst::Compose(at, among, &result);
    fst::Connect(&result);
    fst::RmEpsilon(&result);
    return result;
  }

  // The likelihood that a form comes out so, as Candidate::weight. `surface`: SurfaceForms of it; no state has two arcs for
  // one letter.
  double Weight(const std::vector<int>& ids, const std::map<std::pair<int, int>, int>& surface, int end) {
    std::vector<int> labels;
    for (int id : ids) labels.push_back(numbers.Number(letters[id]));
    Lattice lattice = Lattice::Of(labels);
    std::int32_t flags = 0;
    for (const Segment& segment : data.segments) lattice = Through(lattice, segment, &numbers, &flags);
    const double probability = Probability(
        lattice,
        [&](int state, int label) {
          const auto found = surface.find({state, letters.Find(numbers[label])});
          return found == surface.end() ? -1 : found->second;
        },
        [&](int state) { return state == end; });
    constexpr double kDigits = 1e6;
    return std::round(std::max(0.0, -std::log(probability)) * kDigits) / kDigits;
  }

  // The `count` paths with the fewest restorations.
  struct Path {
    std::vector<int> ids;
    int restorations = 0;
  };
  std::vector<Path> Shortest(const Fst& machine, std::size_t count) const {
    std::vector<Path> found;
    Fst paths;
    const bool several = weighted || words != nullptr;  // paths of one form
    fst::ShortestPath(machine, &paths, static_cast<int>(count), several);
    if (paths.Start() < 0) return found;
    if (paths.Final(paths.Start()) != fst::TropicalWeight::Zero()) found.emplace_back();
    // The result is a tree of paths from the start.
    for (fst::ArcIterator<Fst> first(paths, paths.Start()); !first.Done(); first.Next()) {
      Path path;
      float weight = 0;
      StdArc arc = first.Value();
      while (true) {
        if (arc.ilabel != 0) path.ids.push_back(arc.ilabel);
        weight += arc.weight.Value();
        if (paths.NumArcs(arc.nextstate) == 0) break;
        arc = fst::ArcIterator<Fst>(paths, arc.nextstate).Value();
      }
      weight += paths.Final(arc.nextstate).Value();
      path.restorations = static_cast<int>(weight + 0.5F);
      found.push_back(std::move(path));
    }
    std::stable_sort(found.begin(), found.end(),
                     [](const Path& a, const Path& b) { return a.restorations < b.restorations; });
    return found;
  }

  // The paths among which the `best` candidates are, and one more if there is one. Where rules are optional, all that have as
  // few restorations as the last of them, as far as the limit goes.
  std::vector<Path> ShortestPaths(const Fst& machine, std::size_t best) const {
    for (std::size_t count = best + 1;;) {
      std::vector<Path> paths = Shortest(machine, count);
      const bool whole = paths.size() < count || paths.back().restorations > paths[best - 1].restorations;
      if (!weighted || whole || count >= Limits().candidates) return paths;
      count = std::min(2 * count, Limits().candidates);
    }
  }

  std::string Text(const std::vector<int>& ids) const {
    std::vector<const InputLetter*> spelled_as;
    for (int id : ids) spelled_as.push_back(input_of.at(id));
    return WriteInputs(grammar, spelled_as);
  }

  // The letters on cycles, with the first rule that deletes them.
  std::string InfiniteWhy(const Fst& candidates) const {
    std::set<std::string> names;
    std::set<int> on_cycles;
    for (int s = 0; s < candidates.NumStates(); ++s) {
      for (fst::ArcIterator<Fst> it(candidates, s); !it.Done(); it.Next()) {
        const auto found = input_of.find(it.Value().ilabel);
        if (found == input_of.end() || found->second->symbol < 0) continue;
        if (names.count(grammar.inventory.symbols[found->second->symbol].text) > 0) continue;
        if (!Reaches(candidates, it.Value().nextstate, s)) continue;
        names.insert(grammar.inventory.symbols[found->second->symbol].text);
        on_cycles.insert(it.Value().ilabel);
      }
    }
    std::string text = "any number of";
    for (const std::string& name : names) text += " " + name;
    const std::string rules = DeletingRules(on_cycles);
    return rules.empty() ? text : fmt::format("{} ({})", text, rules);
  }

  static bool Reaches(const Fst& machine, int from, int to) {
    std::vector<char> seen(machine.NumStates(), 0);
    std::vector<int> stack{from};
    while (!stack.empty()) {
      const int s = stack.back();
      stack.pop_back();
      if (s == to) return true;
      if (seen[s]) continue;
      seen[s] = 1;
      for (fst::ArcIterator<Fst> it(machine, s); !it.Done(); it.Next()) stack.push_back(it.Value().nextstate);
    }
    return false;
  }

  // The rules that delete such a symbol, as their patterns say; if an earlier rule changes it first, all that delete.
  std::string DeletingRules(const std::set<int>& letters_on_cycles) const {
    std::string fitting, all;
    for (const Rule& rule : grammar.rules) {
      for (const Change& change : rule.changes) {
        if (change.op != Change::Op::kDelete && !(change.op == Change::Op::kDelink && change.node == kRootNode))
          continue;
        const std::string name = fmt::format("rule \"{}\"", rule.name);
        all += (all.empty() ? "" : ", ") + name;
        const SlotTest* test = TestOf(rule.where, change.target);
        const bool fits =
            test != nullptr && std::any_of(letters_on_cycles.begin(), letters_on_cycles.end(),
                                           [&](int id) { return data.classes->Matches(letters[id].class_id, *test); });
        if (fits) fitting += (fitting.empty() ? "" : ", ") + name;
        break;
      }
    }
    return fitting.empty() ? all : fitting;
  }

  static const SlotTest* TestOf(const Pattern& pattern, int label) {
    for (const PatternItem& item : pattern.items) {
      if (item.kind == PatternItem::Kind::kSlot && item.label == label) return &item.test;
      for (const Pattern& alternative : item.alternatives) {
        const SlotTest* found = TestOf(alternative, label);
        if (found != nullptr) return found;
      }
    }
    return nullptr;
  }

 private:
  std::set<int> written_;
};

Recovery::Recovery(const Grammar& grammar, const Cascade& cascade)
    : impl_(std::make_unique<Impl>(grammar, cascade.data())) {}
Recovery::~Recovery() = default;

void Recovery::AllowOnly(const WordGraph& words, std::vector<std::string>* left_out) {
  impl_->AllowOnly(words, left_out);
}

bool Recovery::Recover(const std::vector<Token>& surface, std::size_t best, Runner::Candidates* candidates) {
  const Fst forms = impl_->SurfaceForms(surface);
  const Fst machine = impl_->Candidates(forms, impl_->allowed);
  if (machine.Properties(fst::kError, false) != 0) return false;
  *candidates = {};
  if (machine.Start() == fst::kNoStateId) return true;
  candidates->infinite = machine.Properties(fst::kAcyclic, true) == 0;
  if (candidates->infinite) candidates->infinite_why = impl_->InfiniteWhy(machine);
  std::map<std::pair<int, int>, int> surface_arcs;
  int surface_end = 0;
  if (impl_->weighted) surface_arcs = ArcsOf(forms, &surface_end);
  std::set<std::string> seen;
  for (const Impl::Path& path : impl_->ShortestPaths(machine, best)) {
    Runner::Candidate candidate;
    candidate.form = impl_->Text(path.ids);
    if (!seen.insert(candidate.form).second) continue;
    candidate.restorations = path.restorations;
    if (impl_->weighted) candidate.weight = impl_->Weight(path.ids, surface_arcs, surface_end);
    if (impl_->words != nullptr) candidate.gloss = impl_->words->GlossOf(path.ids);
    candidates->best.push_back(std::move(candidate));
  }
  std::stable_sort(candidates->best.begin(), candidates->best.end(), [](const auto& a, const auto& b) {
    return std::tie(a.restorations, a.weight) < std::tie(b.restorations, b.weight);
  });
  candidates->more = candidates->best.size() > best || candidates->infinite;
  if (candidates->best.size() > best) candidates->best.resize(best);
  return true;
}

bool Recovery::IsCandidate(const std::vector<LetterClasses::Parts>& underlying, const std::vector<Token>& surface) {
  Fst form;
  int state = form.AddState();
  form.SetStart(state);
  for (const LetterClasses::Parts& parts : underlying) {
    const int id = impl_->letters.Id(parts.class_id, parts.rest);
    const int next = form.AddState();
    form.AddArc(state, StdArc(id, id, kFree, next));
    state = next;
  }
  form.SetFinal(state, kFree);
  Fst both;
  fst::Compose(impl_->Candidates(impl_->SurfaceForms(surface), impl_->underlying), form, &both);
  fst::Connect(&both);
  return both.Start() != fst::kNoStateId;
}

}  // namespace tiersmith
