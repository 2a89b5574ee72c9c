// SPDX-License-Identifier: MIT
// Processor time of this thread: what others do on the machine is not in it. By the wall clock whoever takes
// longer is also interrupted more often, and a comparison on a busy machine would flatter the quicker one.
#pragma once

#include <time.h>

namespace holdfast::bench {

[[nodiscard]] inline double processor_us() {
    timespec now{};
    ::clock_gettime(CLOCK_THREAD_CPUTIME_ID, &now);
    return 1e6 * static_cast<double>(now.tv_sec) + 1e-3 * static_cast<double>(now.tv_nsec);
}

}  // namespace holdfast::bench
