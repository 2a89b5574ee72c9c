// SPDX-License-Identifier: MIT
// Exit statuses that scripts rely on.
#pragma once

namespace holdfast::node {

enum ExitStatus : int {
    kDone = 0,
    kFailed = 1,      // nothing, or not all, could be sent or written; standard error says why
    kWrongUse = 2,    // the command line makes no sense
    kIncomplete = 3,  // done, on input that broke off or was stopped
};

}  // namespace holdfast::node
