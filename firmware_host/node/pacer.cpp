// SPDX-License-Identifier: MIT
#include "firmware_host/node/pacer.hpp"

#include <time.h>

#include <algorithm>

namespace holdfast::node {
namespace {

constexpr std::int64_t kSecond_ns = 1'000'000'000;
constexpr double kFarthest_ns = 1e18;  // thirty years: keeps absurd times within the clock's range

}  // namespace

std::int64_t SteadyTime::now_ns() {
    timespec now{};
    clock_gettime(CLOCK_MONOTONIC, &now);
    return now.tv_sec * kSecond_ns + now.tv_nsec;
}

void SteadyTime::sleep_until_ns(std::int64_t time_ns) {
    const timespec until{.tv_sec = time_ns / kSecond_ns, .tv_nsec = time_ns % kSecond_ns};
    clock_nanosleep(CLOCK_MONOTONIC, TIMER_ABSTIME, &until, nullptr);
}

bool Pacer::wait_for(std::int64_t source_time_ns) {
    if (pace_ == 0) return true;
    if (!first_source_ns_) {
        first_source_ns_ = source_time_ns;
        start_ns_ = time_.now_ns();
    }
    const double elapsed_ns =
        (static_cast<double>(source_time_ns) - static_cast<double>(*first_source_ns_)) / pace_;
    const std::int64_t due_ns =
        start_ns_ + static_cast<std::int64_t>(std::clamp(elapsed_ns, -kFarthest_ns, kFarthest_ns));
    if (time_.now_ns() < due_ns) time_.sleep_until_ns(due_ns);
    const std::int64_t lateness_ns = time_.now_ns() - due_ns;
    if (lateness_ns < 0) return false;
    worst_lateness_ns_ = std::max(worst_lateness_ns_, lateness_ns);
    if (lateness_ns > kSlip_ns) ++slips_;
    return true;
}

}  // namespace holdfast::node
