// SPDX-License-Identifier: MIT
#include "firmware_host/car/sensors.hpp"

#include <algorithm>
#include <cmath>

namespace holdfast::sim {

Sensors::Sensors(const SensorTable& table, std::vector<Fault> faults, double frame_rate_hz,
                 std::uint64_t seed)
    : table_(table),
      faults_(std::move(faults)),
      stuck_at_(faults_.size(), std::numeric_limits<double>::quiet_NaN()),
      frame_rate_hz_(frame_rate_hz),
      random_(seed, Stream::sensors) {
    const bool any_latency = std::any_of(table_.begin(), table_.end(), [](const auto& sensor) {
        return sensor.fitted && sensor.latency_s > 0.0;
    });
    if (any_latency) past_.resize(static_cast<std::size_t>(std::ceil(kLatencyLimitS * frame_rate_hz)) + 2);
}

void Sensors::read(std::int64_t tick, const TrueValues& now, Frame& frame) {
    if (!past_.empty()) past_[static_cast<std::size_t>(tick) % past_.size()] = now;
    const double time_s = static_cast<double>(tick) / frame_rate_hz_;
    for (std::size_t i = 0; i < kChannelCount; ++i) {
        if (!table_[i].fitted || !due(table_[i], tick)) continue;
        const double true_value = table_[i].latency_s > 0.0 ? delayed(i, tick) : now[i];
        double value = reading(i, true_value, time_s);
        if (spoil(static_cast<Channel>(i), time_s, value)) frame.set(static_cast<Channel>(i), value);
    }
}

bool Sensors::due(const SensorParameters& sensor, std::int64_t tick) const {
    constexpr double kRounding = 1e-6;  // of a sample interval
    const auto samples_by = [&](std::int64_t n) {
        const double since_s = static_cast<double>(n) / frame_rate_hz_ - sensor.first_s;
        return std::floor(since_s * sensor.rate_hz + kRounding);
    };
    const double by_now = samples_by(tick);
    return by_now >= 0.0 && by_now > samples_by(tick - 1);
}

double Sensors::delayed(std::size_t channel, std::int64_t tick) const {
    const double ticks = std::min(static_cast<double>(tick), table_[channel].latency_s * frame_rate_hz_);
    const auto whole = static_cast<std::int64_t>(ticks);
    const double share = ticks - static_cast<double>(whole);
    const auto at = [&](std::int64_t n) {
        return past_[static_cast<std::size_t>(std::max<std::int64_t>(0, n)) % past_.size()][channel];
    };
    return (1.0 - share) * at(tick - whole) + share * at(tick - whole - 1);
}

double Sensors::reading(std::size_t channel, double true_value, double time_s) {
    const SensorParameters& sensor = table_[channel];
    if (sensor.walk_per_sqrt_s > 0.0) {
        walk_[channel] +=
            sensor.walk_per_sqrt_s * std::sqrt(time_s - last_read_s_[channel]) * random_.normal();
    }
    last_read_s_[channel] = time_s;
    double value =
        (1.0 + sensor.gain_error) * true_value + sensor.offset + sensor.drift_per_s * time_s + walk_[channel];
    if (sensor.noise_sd > 0.0) value += sensor.noise_sd * random_.normal();
    if (sensor.resolution > 0.0) value = std::round(value / sensor.resolution) * sensor.resolution;
    return value;
}

// Applies the faults of a channel; false: the sample does not come.
bool Sensors::spoil(Channel channel, double time_s, double& value) {
    bool comes = true;
    for (std::size_t i = 0; i < faults_.size(); ++i) {
        const Fault& fault = faults_[i];
        if (fault.channel != channel || time_s < fault.from_s || time_s >= fault.until_s) continue;
        switch (fault.kind) {
            case FaultKind::stuck:
                if (std::isnan(stuck_at_[i])) stuck_at_[i] = value;
                value = stuck_at_[i];
                break;
            case FaultKind::drift:
                value += fault.magnitude * (time_s - fault.from_s);
                break;
            case FaultKind::spikes:
                if (random_.happens(0.02)) value += random_.happens(0.5) ? fault.magnitude : -fault.magnitude;
                break;
            case FaultKind::step:
                value += fault.magnitude;
                break;
            case FaultKind::noise:
                value += fault.magnitude * random_.normal();
                break;
            case FaultKind::gone:
                comes = false;
                break;
            case FaultKind::gaps:
                comes = comes && !random_.happens(fault.magnitude);
                break;
            case FaultKind::invalid:
                value = std::numeric_limits<double>::quiet_NaN();
                break;
        }
    }
    return comes;
}

}  // namespace holdfast::sim
