// SPDX-License-Identifier: MIT
// The channels without which there is no estimate, besides time and a ride height at each axle.
#pragma once

#include <array>

#include "proto/vocabulary/channel.hpp"

namespace holdfast::session {

// flap_position may come as flap_angle instead.
inline constexpr std::array kNeededChannels{Channel::speed,   Channel::load_fl, Channel::load_fr,
                                            Channel::load_rl, Channel::load_rr, Channel::flap_position};

}  // namespace holdfast::session
