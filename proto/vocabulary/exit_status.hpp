// SPDX-License-Identifier: MIT
// Exit statuses of the programs; scripts rely on them.
#pragma once

namespace holdfast {

enum ExitStatus : int {
    kDone = 0,
    kFailed = 1,      // nothing, or not all, could be done; standard error says why
    kWrongUse = 2,    // the command line makes no sense
    kIncomplete = 3,  // done, on input that broke off or was stopped; where there is a summary, it says so
};

}  // namespace holdfast
