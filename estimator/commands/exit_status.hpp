// SPDX-License-Identifier: MIT
// Exit statuses that scripts rely on.
#pragma once

namespace holdfast::commands {

enum ExitStatus : int {
    kDone = 0,
    kFailed = 1,      // nothing, or not all, could be done; standard error says why
    kWrongUse = 2,    // the command line makes no sense
    kIncomplete = 3,  // done, on input that broke off or was stopped; summary.json says "complete": false
};

}  // namespace holdfast::commands
