// SPDX-License-Identifier: MIT
// How a socket notices that its peer is gone without a word: switched off, out of range.
#pragma once

namespace holdfast::link {

// `socket`: a handle of ZeroMQ's, before it binds or connects. `unacknowledged_ms`: how long what was sent
// may stay untaken before the connection is given up.
void watch_peer(void* socket, int unacknowledged_ms);

}  // namespace holdfast::link
