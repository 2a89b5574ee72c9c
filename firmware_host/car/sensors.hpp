// SPDX-License-Identifier: MIT
// The sensors: what the true value becomes on its way into the log. Each channel has its own rate and errors;
// a fault spoils one channel from a given time on.
#pragma once

#include <array>
#include <cstdint>
#include <limits>
#include <string>
#include <vector>

#include "firmware_host/car/random.hpp"
#include "proto/vocabulary/channel.hpp"
#include "proto/vocabulary/frame.hpp"

namespace holdfast::sim {

// Errors in the channel's SI unit. reading = round(((1 + gain_error) true + offset + drift) / resolution)
// resolution.
struct SensorParameters {
    bool fitted = false;
    double rate_hz = 400.0;  // at most the frame rate
    double first_s = 0.0;    // time of the first sample; others follow at the rate
    double noise_sd = 0.0;   // white, from sample to sample
    double gain_error = 0.0;
    double offset = 0.0;
    double drift_per_s = 0.0;
    double walk_per_sqrt_s = 0.0;  // random walk beside the drift
    double resolution = 0.0;       // 0: none
    double latency_s = 0.0;        // the value is of that long ago; at most kLatencyLimitS
};

inline constexpr double kLatencyLimitS = 0.1;

using SensorTable = std::array<SensorParameters, kChannelCount>;

// Where a ride-height sensor sits, and what it truly reads at rest. x from the front axle line, forward; y
// left.
struct RideHeightPlace {
    std::string name;
    double static_m = 0.0;
    double x_m = 0.0;
    double y_m = 0.0;
};

enum class FaultKind : std::uint8_t {
    stuck,    // repeats the reading of from_s
    drift,    // magnitude per second, added
    spikes,   // +-magnitude added to one sample in fifty
    step,     // magnitude, added
    noise,    // white noise of standard deviation magnitude, added
    gone,     // no samples
    gaps,     // a share `magnitude` of the samples is missing
    invalid,  // not-a-number instead of a reading
};

struct Fault {
    Channel channel = Channel::speed;
    FaultKind kind = FaultKind::gone;
    double from_s = 0.0;
    double until_s = std::numeric_limits<double>::infinity();
    double magnitude = 0.0;
};

// True values of one instant, by channel, SI.
using TrueValues = std::array<double, kChannelCount>;

class Sensors {
  public:
    Sensors(const SensorTable& table, std::vector<Fault> faults, double frame_rate_hz, std::uint64_t seed);

    // The frame of tick `tick` (0, 1, ... at the frame rate): samples of the channels that are due.
    void read(std::int64_t tick, const TrueValues& now, Frame& frame);

  private:
    [[nodiscard]] bool due(const SensorParameters& sensor, std::int64_t tick) const;
    double delayed(std::size_t channel, std::int64_t tick) const;
    double reading(std::size_t channel, double true_value, double time_s);
    bool spoil(Channel channel, double time_s, double& value);

    SensorTable table_;
    std::vector<Fault> faults_;
    std::vector<double> stuck_at_;  // one for each fault; NaN until it begins
    double frame_rate_hz_;
    Random random_;
    std::array<double, kChannelCount> walk_{};
    std::array<double, kChannelCount> last_read_s_{};
    std::vector<TrueValues> past_;  // ring, one for each tick; empty where no channel has latency
};

}  // namespace holdfast::sim
