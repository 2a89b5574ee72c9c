// SPDX-License-Identifier: MIT
// Ctrl-C (SIGINT) and SIGTERM as a question that loops ask, so that files and streams are ended whole.
#pragma once

#include <string>

namespace holdfast::session {

// From now on the first such signal is noted and left to the loops; a second one ends the program at once.
void note_interrupts();

[[nodiscard]] bool interrupted();
// "stopped by SIGINT"
[[nodiscard]] std::string interrupt_reason();

}  // namespace holdfast::session
