#include "cli/outputs.h"

#include <fmt/format.h>

#include <string>

namespace tiersmith::cli {

namespace {

// Machines hold weights as floats: .4375 would be shown as 0.437.
double Rounded(double probability) { return std::stod(fmt::format("{:.6g}", probability)); }

}  // namespace

std::string Listed(const std::vector<Runner::Output>& outputs, const std::string& between) {
  std::string out;
  for (const Runner::Output& output : outputs) {
    if (!out.empty()) out += between;
    out += output.surface;
    if (output.probability == 1) continue;
    const double probability = Rounded(output.probability);
    if (probability != 1) out += fmt::format(" {:.3g}", probability);
  }
  return out.empty() ? kNoOutput : out;
}

nlohmann::ordered_json Json(const std::vector<Runner::Output>& outputs) {
  nlohmann::ordered_json json = nlohmann::ordered_json::array();
  for (const Runner::Output& output : outputs)
    json.push_back({{"surface", output.surface}, {"probability", Rounded(output.probability)}});
  return json;
}

}  // namespace tiersmith::cli
