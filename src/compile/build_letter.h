// One letter after a rule: its parts, and where each came from.
//
// Used twice: by iterative rules, which must know what stands behind them, and by the last pass, which
// computes the link bits from the origins (compile/rule_machine.h).
#pragma once

#include <vector>

#include "compile/requests.h"
#include "letters/letter.h"

namespace tiersmith {

enum class Origin : std::uint8_t {
  kOwn,      // was there
  kOldLeft,  // the N that was nearest on the left before the rule
  kOldRight,
  kNewLeft,  // the last N on the left as it is after the rule (iterative)
  kNewRight,
  kFresh,
  kFreshJoined,  // a new root that is also that of the slot on the right
};

struct WorkPart {
  NodeId node = 0;
  Value value = 0;
  Origin origin = Origin::kOwn;
  int old_index = -1;       // kOwn: position among the mother's old instances of the node
  std::uint32_t links = 0;  // for each daughter kind: is the last one linked to the right, as an object (kObjectRight)
  std::vector<WorkPart> daughters;
};

// It and all under it are new, but for what a line led here.
void Freshen(WorkPart* part);

// A new part of this content.
WorkPart FreshPart(const FeatureTree& content);

// The first or last part of a node under `part`, or null.
const WorkPart* FindPart(const WorkPart& part, NodeId node, bool last);

// Contents that travel, with the links of their right end.
class ContentPool {
 public:
  int Intern(const WorkPart& part);
  WorkPart Get(int id, Origin origin) const;
  bool Equal(int id, const WorkPart& part) const;  // contents only

 private:
  Alphabet parts_;
};

struct BuiltLetter {
  WorkPart slot;
  bool clash = false;
  bool unsure = false;          // what else happens to a node that moves here, or from here, is not known
  std::vector<char> effective;  // by request node: did the mother's list change
};

class LetterBuilder {
 public:
  LetterBuilder(const RequestSpace& requests, ContentPool& pool) : requests_(requests), pool_(pool) {}

  // The letter's parts before the rule, links replaced by kObjectRight marks.
  WorkPart Before(const Key& annotated) const;
  // The first or last N of a letter as content, or -1; with what is asked (by request node; null: nothing) under it.
  int ContentOf(const Key& annotated, NodeId node, bool last, const std::int32_t* asks, bool* unsure) const;

  // Carries the nearest content of a node along, walking over letters; gives the one that a line from this letter's mother
  // leads back to, or -1. state[0]: the last content met (+1); state[1]: the last before the span of the mother we
  // are in (+1). `needed`: will a letter further on ask for this letter's? `asks`: as above.
  std::int32_t CarryContent(const Key& annotated, NodeId node, bool rightward, bool needed, const std::int32_t* asks,
                            std::int32_t* state, bool* unsure) const;

  struct Lines {  // contents the requests may draw on, by request node; -1: none
    const std::int32_t* left = nullptr;
    const std::int32_t* right = nullptr;
    Origin left_origin = Origin::kOldLeft;
    Origin right_origin = Origin::kOldRight;
  };
  // `asks`: by request node.
  BuiltLetter Build(const Key& annotated, const std::int32_t* asks, const Lines& lines) const;
  // What a change inserts, with what others ask of it; `lines` are those of all blocks of the request.
  BuiltLetter BuildInserted(std::size_t change, const Key& plain, const Key& request, Lines lines) const;

  // A letter of a work tree with the given links dropped, as a class that keeps the rest key of `like`.
  int ClassOf(const WorkPart& slot, int like) const;
  static LetterPart Plain(const WorkPart& part, bool links);

 private:
  WorkPart* MotherFor(WorkPart* slot, NodeId node, bool make) const;
  bool Gives(std::int32_t ask) const;
  NodeId RelinkedAbove(NodeId node, const std::int32_t* asks) const;
  void Answer(std::size_t index, const Key& annotated, const std::int32_t* asks, const Lines& lines,
              BuiltLetter* built) const;
  void Relist(WorkPart* mother, NodeId node, std::int32_t request, std::size_t index, const Key& annotated,
              const Lines& lines, BuiltLetter* built) const;
  bool DrawLines(NodeId node, std::int32_t request, std::size_t index, const Key& annotated, const Lines& lines,
                 std::vector<WorkPart>* list, bool* clash) const;
  bool Prune(WorkPart* part) const;

  const RequestSpace& requests_;
  ContentPool& pool_;
};

}  // namespace tiersmith
