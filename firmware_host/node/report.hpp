// SPDX-License-Identifier: MIT
// What a node tells a person, on standard error.
#pragma once

#include <string>

#include "firmware_host/node/pacer.hpp"
#include "firmware_host/node/uplink.hpp"

namespace holdfast::node {

void tell_error(const std::string& message);
void tell_note(const std::string& message);

// " once 1 has subscribed"; nothing where nobody is waited for.
[[nodiscard]] std::string when_it_begins(std::size_t subscribers);

// "sent 24000 frames in 24000 messages; the latest was 0.4 ms late, 0 were more than 10 ms
// late".
[[nodiscard]] std::string sending_report(const Uplink& uplink, const Pacer& pacer);

}  // namespace holdfast::node
