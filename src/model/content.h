// Asking and changing a feature tree (the content of one root) as a plain value.
// Tested by tests/unit/model/inventory_test.cc.
#pragma once

#include <functional>
#include <vector>

#include "model/feature_tree.h"
#include "model/tree.h"

namespace tiersmith {

// Does an instance of `node` stand in `content`? With `value`, one of that value.
bool Bears(const FeatureTree& content, NodeId node);
bool BearsValue(const FeatureTree& content, NodeId node, Value value);
// How many of `node` there are, all mothers together.
int CountOf(const FeatureTree& content, NodeId node);

// The instance of class node `node`, made together with the class nodes above it where it is missing.
// Requires: `content` is of a node that dominates `node`; `node` is a class node.
FeatureTree* Ensure(const Tree& tree, FeatureTree* content, NodeId node);
// The mother of `node` gets exactly these values of it, in order (none: taken away). Class nodes above come
// along.
void SetValues(const Tree& tree, FeatureTree* content, NodeId node, const std::vector<Value>& values);
// Takes every instance of `node` away with all under it.
void Remove(FeatureTree* content, NodeId node);
// Takes away class nodes with nothing under them that do not stand on their own. The topmost one stays.
void Prune(const Tree& tree, FeatureTree* content);

// Does a slot whose root has this content pass the test? `literal` answers for kLiteral.
bool Passes(const SlotTest& test, const FeatureTree& root, const std::function<bool(int)>& literal);

// What must be done to `from` to get `to`, as a bundle would say it: "+back, no Place". `steps` counts them.
std::string Difference(const Tree& tree, const FeatureTree& from, const FeatureTree& to, int* steps);

}  // namespace tiersmith
