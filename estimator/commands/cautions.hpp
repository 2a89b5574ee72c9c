// SPDX-License-Identifier: MIT
// What anyone who acts on the results has to know; shown by the --help of the commands that advise, on the
// wall page and in the report.
#pragma once

#include <array>
#include <string>
#include <string_view>

namespace holdfast::commands {

inline constexpr std::array<std::string_view, 4> kCautionSentences{
    "The results are estimates, with uncertainties, for a competent engineer to weigh; this program is not a "
    "safety device, and nothing on a car may depend on it.",
    "The series' regulations, the circuit's rules and the team's responsible engineers decide.",
    "A doubt about the structure or the sensors stops the car.",
    "No alarm is no proof: what could not be computed is shown as unknown, and unknown is not fine.",
};

[[nodiscard]] inline std::string cautions() {
    std::string text = "Cautions:";
    for (const std::string_view sentence : kCautionSentences) text.append("\n  - ").append(sentence);
    return text + "\n";
}

}  // namespace holdfast::commands
