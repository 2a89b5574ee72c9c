// SPDX-License-Identifier: MIT
#include "proto/columns.hpp"

#include <algorithm>
#include <array>

#include "holdfast.pb.h"

namespace holdfast::proto {
namespace {

struct NamedColumn {
    bool (wire::FrameBlock::*has)() const;
    const wire::Column& (wire::FrameBlock::*get)() const;
    wire::Column* (wire::FrameBlock::*make)();
};

#define HOLDFAST_COLUMN(field) \
    { &wire::FrameBlock::has_##field, &wire::FrameBlock::field, &wire::FrameBlock::mutable_##field }

// In the order of Channel; ride heights are columns by name.
constexpr std::array<NamedColumn, index(Channel::ride_height_0)> kColumns{{
    HOLDFAST_COLUMN(speed_mps),         HOLDFAST_COLUMN(load_fl_n),
    HOLDFAST_COLUMN(load_fr_n),         HOLDFAST_COLUMN(load_rl_n),
    HOLDFAST_COLUMN(load_rr_n),         HOLDFAST_COLUMN(flap_position),
    HOLDFAST_COLUMN(flap_angle_rad),    HOLDFAST_COLUMN(flap_command),
    HOLDFAST_COLUMN(brake_pressure_pa), HOLDFAST_COLUMN(accel_x_mps2),
    HOLDFAST_COLUMN(accel_y_mps2),      HOLDFAST_COLUMN(accel_z_mps2),
    HOLDFAST_COLUMN(throttle),          HOLDFAST_COLUMN(drive_force_n),
    HOLDFAST_COLUMN(pitot_pressure_pa), HOLDFAST_COLUMN(heading_rad),
    HOLDFAST_COLUMN(yaw_rate_radps),    HOLDFAST_COLUMN(lap),
    HOLDFAST_COLUMN(lap_distance_m),    HOLDFAST_COLUMN(air_temperature_k),
    HOLDFAST_COLUMN(air_pressure_pa),   HOLDFAST_COLUMN(relative_humidity),
}};
#undef HOLDFAST_COLUMN

constexpr std::uint64_t bit(std::size_t channel) {
    return std::uint64_t{1} << channel;
}
constexpr std::uint64_t kAllChannels = bit(kChannelCount) - 1;

void fill_column(std::size_t channel, std::size_t samples, std::span<const Frame> frames,
                 wire::Column& column) {
    auto& values = *column.mutable_value();
    values.Reserve(static_cast<int>(samples));
    if (samples == frames.size()) {
        for (const Frame& frame : frames) values.AddAlreadyReserved(frame.value[channel]);
        return;
    }
    auto& steps = *column.mutable_row_step();
    steps.Reserve(static_cast<int>(samples));
    std::size_t last_row = 0;
    for (std::size_t row = 0; row < frames.size(); ++row) {
        if ((frames[row].present & bit(channel)) == 0) continue;
        steps.AddAlreadyReserved(static_cast<std::uint32_t>(row - last_row));
        values.AddAlreadyReserved(frames[row].value[channel]);
        last_row = row;
    }
}

std::optional<std::string> read_column(const wire::Column& column, std::size_t channel,
                                       std::span<Frame> frames) {
    const auto& values = column.value();
    const auto& steps = column.row_step();
    if (values.empty() && steps.empty()) return std::nullopt;
    if (steps.empty()) {
        if (static_cast<std::size_t>(values.size()) != frames.size())
            return std::to_string(values.size()) + " values for " + std::to_string(frames.size()) + " rows";
        for (std::size_t row = 0; row < frames.size(); ++row) {
            frames[row].value[channel] = values[static_cast<int>(row)];
            frames[row].present |= bit(channel);
        }
        return std::nullopt;
    }
    if (values.size() != steps.size())
        return std::to_string(values.size()) + " values for " + std::to_string(steps.size()) + " row steps";
    std::uint64_t row = 0;
    for (int i = 0; i < values.size(); ++i) {
        if (i > 0 && steps[i] == 0) return "the same row twice";
        row += steps[i];
        if (row >= frames.size())
            return "row " + std::to_string(row) + " of a block with " + std::to_string(frames.size());
        frames[row].value[channel] = values[i];
        frames[row].present |= bit(channel);
    }
    return std::nullopt;
}

std::string in_channel(std::string_view name, const std::string& what) {
    return "channel " + std::string(name) + ": " + what;
}

}  // namespace

void frames_to_columns(const StreamInfo& info, std::span<const Frame> frames, wire::FrameBlock& block) {
    std::array<std::size_t, kChannelCount> samples{};
    for (const Frame& frame : frames)
        for (std::uint64_t left = frame.present & kAllChannels; left != 0; left &= left - 1)
            ++samples[static_cast<std::size_t>(__builtin_ctzll(left))];

    for (std::size_t channel = 0; channel < kColumns.size(); ++channel)
        if (samples[channel] > 0 || (info.channels & bit(channel)) != 0)
            fill_column(channel, samples[channel], frames, *(block.*kColumns[channel].make)());
    for (std::size_t slot = 0; slot < info.ride_height_names.size(); ++slot) {
        const std::size_t channel = index(ride_height_channel(slot));
        wire::RideHeight& ride_height = *block.add_ride_height();
        ride_height.set_name(info.ride_height_names[slot]);
        // Without the column, the name only keeps its slot.
        if (samples[channel] > 0 || (info.channels & bit(channel)) != 0)
            fill_column(channel, samples[channel], frames, *ride_height.mutable_height_m());
    }
}

std::optional<std::string> columns_to_frames(const wire::FrameBlock& block, StreamInfo& info,
                                             std::span<Frame> frames) {
    for (std::size_t channel = 0; channel < kColumns.size(); ++channel) {
        if (!(block.*kColumns[channel].has)()) continue;
        info.channels |= bit(channel);
        if (auto why = read_column((block.*kColumns[channel].get)(), channel, frames))
            return in_channel(kChannelInfo[channel].name, *why);
    }
    const auto slots = static_cast<std::size_t>(block.ride_height_size());
    if (slots > kMaxRideHeights)
        return std::to_string(slots) + " ride heights, at most " + std::to_string(kMaxRideHeights) +
               " expected";
    for (std::size_t slot = 0; slot < slots; ++slot) {
        const wire::RideHeight& ride_height = block.ride_height(static_cast<int>(slot));
        const auto& names = info.ride_height_names;
        if (std::find(names.begin(), names.end(), ride_height.name()) != names.end())
            return "ride height \"" + ride_height.name() + "\" twice";
        info.ride_height_names.push_back(ride_height.name());
        if (!ride_height.has_height_m()) continue;
        const std::size_t channel = index(ride_height_channel(slot));
        info.channels |= bit(channel);
        if (auto why = read_column(ride_height.height_m(), channel, frames))
            return in_channel("ride_height_" + ride_height.name(), *why);
    }
    return std::nullopt;
}

}  // namespace holdfast::proto
