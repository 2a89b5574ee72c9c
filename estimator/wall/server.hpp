// SPDX-License-Identifier: MIT
// Serves the wall page: its files over HTTP, the outing over one WebSocket a viewer (answer.hpp: who may see
// it; audience.hpp: who is sent what; README.md: the messages). One thread of its own. post() takes a lock
// that is never held during input or output: no viewer, however slow, costs the poster anything.
#pragma once

#include <chrono>
#include <cstdint>
#include <memory>
#include <span>
#include <string>
#include <vector>

#include "estimator/wall/item.hpp"
#include "estimator/wall/page_file.hpp"

namespace holdfast::wall {

struct ServerOptions {
    std::string listen = "127.0.0.1:8080";  // HOST:PORT or [HOST]:PORT; port 0: any that is free
    std::span<const PageFile> files = page_files();
    std::size_t most_viewers = 32;
    std::size_t most_connections = 96;                // viewers and those who fetch files
    std::chrono::milliseconds request_limit{10'000};  // for a request to come whole, an answer to be taken
    std::chrono::milliseconds idle_limit{60'000};     // for a viewer to give a sign of life
    std::chrono::milliseconds last_words{3000};  // for viewers to be sent what is left when the server goes
};

struct ServerCounters {
    std::uint64_t viewers = 0;         // now
    std::uint64_t left_out = 0;        // items that the next one replaced before they were looked at
    std::uint64_t resynchronised = 0;  // viewers that were given the outing so far anew
    std::uint64_t thinned = 0;         // messages with 10 Hz rows in place of what a viewer was too slow for
    std::uint64_t most_waiting = 0;    // texts that ever waited for one viewer
};

class Server {
  public:
    // Listens and serves from now on. Throws std::runtime_error that names the address and what was wrong.
    explicit Server(const ServerOptions& options);
    ~Server();
    Server(const Server&) = delete;
    Server& operator=(const Server&) = delete;

    // What a person opens in the browser; with a token where others than this machine can reach it.
    [[nodiscard]] const std::string& url() const;
    [[nodiscard]] std::uint16_t port() const;

    void post(Item item);
    [[nodiscard]] bool has_viewers() const;
    // Ids of alarms that viewers have acknowledged since the last call.
    [[nodiscard]] std::vector<std::uint32_t> take_acknowledgements();
    [[nodiscard]] ServerCounters counters() const;

  private:
    class Impl;
    std::unique_ptr<Impl> impl_;
};

}  // namespace holdfast::wall
