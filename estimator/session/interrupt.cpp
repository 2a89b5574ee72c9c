// SPDX-License-Identifier: MIT
#include "estimator/session/interrupt.hpp"

#include <csignal>

namespace holdfast::session {
namespace {

volatile std::sig_atomic_t noted_signal = 0;

extern "C" void note_signal(int signal) {
    noted_signal = signal;
}

}  // namespace

void note_interrupts() {
    struct sigaction action = {};
    action.sa_handler = note_signal;
    action.sa_flags = static_cast<int>(SA_RESETHAND);
    sigemptyset(&action.sa_mask);
    sigaction(SIGINT, &action, nullptr);
    sigaction(SIGTERM, &action, nullptr);
}

bool interrupted() {
    return noted_signal != 0;
}

std::string interrupt_reason() {
    return noted_signal == SIGTERM ? "stopped by SIGTERM" : "stopped by SIGINT (Ctrl-C)";
}

}  // namespace holdfast::session
