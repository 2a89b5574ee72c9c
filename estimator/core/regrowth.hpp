// SPDX-License-Identifier: MIT
// The regrowth of one closing as a curve: the share of the flap's downforce that is back against time since
// the flap was shut, with its band, and the flap's own movement. Asked for when somebody looks; nothing of it
// is computed before.
#pragma once

#include <array>
#include <cstddef>
#include <cstdint>

namespace holdfast::core {

struct Regrowth {
    static constexpr std::size_t kPoints = 71;
    static constexpr double kFrom_s = -0.20;  // of the curve, relative to the flap being shut
    static constexpr double kStep_s = 0.02;

    std::uint32_t closure = 0;  // number of the closing; 0: there was none yet
    bool final = false;         // all that the data will tell is in it
    bool shut = false;          // time_shut_s is known; before, the curve is relative to the command
    double time_shut_s = 0.0;   // source time of zero
    double time_command_s = 0.0;
    double chord_time_s = 0.0;            // seconds for one chord at the closing's speed
    double known_until_s = 0.0;           // data end here, relative to zero: the curve beyond is expectation
    std::array<double, kPoints> share{};  // posterior median
    std::array<double, kPoints> low{};    // 95 % credible interval at each instant
    std::array<double, kPoints> high{};

    static constexpr std::size_t kFlapPoints = 128;
    std::array<double, kFlapPoints> flap_time_s{};  // relative to zero
    std::array<double, kFlapPoints> flap_position{};
    std::size_t flap_count = 0;

    [[nodiscard]] static constexpr double time_s(std::size_t i) {
        return kFrom_s + kStep_s * static_cast<double>(i);
    }
};

}  // namespace holdfast::core
