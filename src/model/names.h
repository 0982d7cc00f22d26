// Which name was meant: edit distance over code points.
// Example: "bakc" is "back" with two letters swapped, which counts one step.
// Tested by tests/unit/model/check_test.cc.
#pragma once

#include <string>
#include <string_view>
#include <vector>

namespace tiersmith {

// The candidate nearest to `name` by edit distance, or "" if none is near enough to be meant.
std::string NearestName(std::string_view name, const std::vector<std::string>& candidates);
// "did you mean 'back'? " or "".
std::string DidYouMean(std::string_view name, const std::vector<std::string>& candidates);
// A remedy: the hint first if there is one ("did you mean 'back'? or declare it").
std::string Or(const std::string& hint, const std::string& otherwise);

}  // namespace tiersmith
