// SPDX-License-Identifier: MIT
// What anyone who acts on the results has to know; shown by the --help of the commands that advise.
#pragma once

namespace holdfast::commands {

inline constexpr const char* kCautions =
    "Cautions: the results are estimates, with uncertainties, for a competent engineer to weigh; this "
    "program\n"
    "is not a safety device, and nothing on a car may depend on it. The series' regulations, the circuit's\n"
    "rules and the team's responsible engineers decide. A doubt about the structure or the sensors stops "
    "the\n"
    "car. No alarm is no proof: what could not be computed is shown as unknown, and unknown is not fine.\n";

}  // namespace holdfast::commands
