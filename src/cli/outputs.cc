#include "cli/outputs.h"

#include <fmt/format.h>

#include <string>

namespace tiersmith::cli {

std::string Listed(const std::vector<Runner::Output>& outputs, const std::string& between) {
  constexpr double kRounding = 1e-9;
  std::string out;
  for (const Runner::Output& output : outputs) {
    if (!out.empty()) out += between;
    out += output.surface;
    if (output.probability < 1 - kRounding) out += fmt::format(" {:.3g}", output.probability);
  }
  return out.empty() ? kNoOutput : out;
}

nlohmann::ordered_json Json(const std::vector<Runner::Output>& outputs) {
  nlohmann::ordered_json json = nlohmann::ordered_json::array();
  for (const Runner::Output& output : outputs)
    json.push_back({{"surface", output.surface}, {"probability", std::stod(fmt::format("{:.6g}", output.probability))}});
  return json;
}

}  // namespace tiersmith::cli
