// SPDX-License-Identifier: MIT
// The texts that the page reads: one JSON object a message, and the one that the page sends. README.md beside
// this file describes them. Numbers carry six significant digits; what is not known is null.
#pragma once

#include <cstdint>
#include <memory>
#include <optional>
#include <span>
#include <string>
#include <string_view>

#include "estimator/wall/item.hpp"

namespace holdfast::wall {

// Made once, shared by all who read it.
using Text = std::shared_ptr<const std::string>;

[[nodiscard]] std::string hello_json(const Hello& hello);
[[nodiscard]] std::string history_json(std::span<const Row> rows, double step_s);

// What a viewer is told of the traces, several times a second.
struct Now {
    std::span<const Row> thinned;  // 10 Hz, in place of samples that this viewer was too slow for
    std::span<const Row> rows;
    Row newest;
    bool any = false;    // there is a newest row
    double age_s = 0.0;  // since it came, by the receiver's clock
    LinkStatus link;
};
[[nodiscard]] std::string now_json(const Now& now);

// One object of its kind, to stand in a list...
[[nodiscard]] std::string closure_object(const core::Closure& closure, double chord_m);
[[nodiscard]] std::string regrowth_object(const ZonedRegrowth& regrowth);
[[nodiscard]] std::string alarm_object(const RailAlarm& alarm, const StreamInfo& stream);
// ...or alone: {"kind":"closure", ...}.
[[nodiscard]] std::string message_of(std::string_view kind, std::string_view object);
[[nodiscard]] std::string list_message(std::string_view kind, std::span<const std::string> objects);

[[nodiscard]] std::string acknowledged_json(const RailAlarm& alarm);
[[nodiscard]] std::string health_json(const Health& health, const StreamInfo& stream);
[[nodiscard]] std::string end_json(const End& end);

// {"do":"acknowledge","id":7} and nothing else: the alarm's id.
[[nodiscard]] std::optional<std::uint32_t> acknowledgement(std::string_view text);

// A JSON text as it may stand inside of <script>: no "<" in it, so that nothing in a name can end the
// element.
[[nodiscard]] std::string inside_html(std::string_view json);
// A string as a JSON literal.
[[nodiscard]] std::string quoted(std::string_view text);

}  // namespace holdfast::wall
