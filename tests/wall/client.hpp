// SPDX-License-Identifier: MIT
// A viewer for the tests: Boost.Beast's client, behind plain calls. Each call fails the test, by throwing,
// when nothing comes for twenty seconds.
#pragma once

#include <cstdint>
#include <map>
#include <memory>
#include <optional>
#include <string>
#include <vector>

namespace holdfast::testing {

struct Reply {
    unsigned status = 0;
    std::map<std::string, std::string> headers;  // names in small letters
    std::string body;
};

// Sends the bytes as they are and reads one answer; nothing where the server closed without one.
[[nodiscard]] std::optional<Reply> ask(std::uint16_t port, const std::string& bytes);
// GET of this target with the right Host and these further lines, each with its line end.
[[nodiscard]] Reply get(std::uint16_t port, const std::string& target, const std::string& lines = {});

// A connection that says nothing: until the server closes it.
void wait_until_closed(std::uint16_t port, const std::string& bytes);

class Watcher {
  public:
    // As the page itself would: Host and Origin of the server. Throws where it is refused.
    explicit Watcher(std::uint16_t port);
    ~Watcher();
    Watcher(Watcher&&) noexcept;

    [[nodiscard]] std::string next();  // message
    // Messages until one of this kind has come, that one last.
    [[nodiscard]] std::vector<std::string> until(const std::string& kind);
    void send(const std::string& text);
    // The server has closed the connection; what came before is read away.
    void wait_until_closed();

  private:
    class Impl;
    std::unique_ptr<Impl> impl_;
};

// The lines that ask for a WebSocket.
[[nodiscard]] std::string upgrade_lines(const std::string& origin);

}  // namespace holdfast::testing
