// SPDX-License-Identifier: MIT
// One connection to the server, from its first request until it is left. Boost.Beast stays behind this
// header.
#pragma once

#include "estimator/wall/hall.hpp"

namespace boost::asio {
class io_context;
}

namespace holdfast::wall {

// Takes over an accepted TCP socket, by its descriptor, and answers on it as long as somebody asks
// (answer.hpp); it may become a viewer of the hall. Runs on the context, which must not outlive the hall.
void begin_connection(Hall& hall, boost::asio::io_context& context, int socket, bool ipv6);

}  // namespace holdfast::wall
