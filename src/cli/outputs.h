// How the verbs write what comes out of a form. With two outputs: "tanta 0.7 ~ tata 0.3".
// Tested by tests/cli/optional.sh.
#pragma once

#include <nlohmann/json.hpp>
#include <string>
#include <vector>

#include "run/run.h"

namespace tiersmith::cli {

inline constexpr const char* kNoOutput = "∅";

// All in one line, with their probabilities, but for one that is certain; ∅ if there is none.
std::string Listed(const std::vector<Runner::Output>& outputs, const std::string& between);
// [{"surface": "tanta", "probability": 0.7}, ..]
nlohmann::ordered_json Json(const std::vector<Runner::Output>& outputs);

}  // namespace tiersmith::cli
