// SPDX-License-Identifier: MIT
// One stream of frames onto the link: numbers its messages, counts its rows, says when it is over.
#pragma once

#include <cstdint>
#include <span>
#include <string>

#include "estimator/link/publisher.hpp"
#include "proto/codec.hpp"
#include "proto/vocabulary/frame.hpp"

namespace holdfast::node {

class Uplink {
  public:
    Uplink(link::Publisher publisher, StreamInfo info);

    // Returns once this many subscribe to the frames. False: a signal came.
    [[nodiscard]] bool wait_for_subscribers(std::size_t count);

    [[nodiscard]] link::SendResult send(std::span<const Frame> frames);

    // Says a few times that the stream is over. complete = false: its source broke off, for this reason.
    void end(bool complete, const std::string& reason);

    [[nodiscard]] const std::string& endpoint() const { return publisher_.endpoint(); }
    [[nodiscard]] std::uint64_t messages() const { return next_sequence_; }
    [[nodiscard]] std::uint64_t rows() const { return rows_; }
    [[nodiscard]] std::uint64_t overflows() const { return publisher_.counters().overflows; }

  private:
    link::Publisher publisher_;
    StreamInfo info_;
    proto::BlockEncoder encoder_;
    std::uint64_t stream_id_;
    std::uint64_t next_sequence_ = 0;
    std::uint64_t rows_ = 0;
};

}  // namespace holdfast::node
