// SPDX-License-Identifier: MIT
#include "estimator/link/watch_peer.hpp"

#include <zmq.hpp>

#include "estimator/link/options.hpp"

namespace holdfast::link {

void watch_peer(void* socket, int unacknowledged_ms) {
    const auto set = [socket](int option, int value) {
        if (zmq_setsockopt(socket, option, &value, sizeof value) != 0) throw zmq::error_t();
    };
    set(ZMQ_TCP_KEEPALIVE, 1);
    set(ZMQ_TCP_KEEPALIVE_IDLE, kKeepaliveIdle_s);
    set(ZMQ_TCP_KEEPALIVE_INTVL, kKeepaliveInterval_s);
    set(ZMQ_TCP_KEEPALIVE_CNT, kKeepaliveProbes);
    set(ZMQ_TCP_MAXRT, unacknowledged_ms);
}

}  // namespace holdfast::link
