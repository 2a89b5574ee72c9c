// SPDX-License-Identifier: MIT
// What the engine says: the estimate of now, a record for each closing of the flap, alarms, and the health of
// each channel. Plain data of fixed size. Units are in the names; *_sd is a standard uncertainty in the same
// unit.
#pragma once

#include <array>
#include <cstdint>

#include "estimator/core/car.hpp"
#include "proto/vocabulary/channel.hpp"

namespace holdfast::core {

// Why a number of the estimate is not to be relied on; bits of Estimate::flags.
enum EstimateFlag : std::uint32_t {
    kNotConverged = 1U << 0,      // too little has been seen yet: the values are the car file's expectation
    kStale = 1U << 1,             // a needed channel has not come for longer than Settings::stale_s
    kGroundReference = 1U << 2,   // no pitot: areas refer to speed over ground, wind is in them
    kStandardAir = 1U << 3,       // no weather channels: density of the standard atmosphere
    kDragByCoasting = 1U << 4,    // no drive force: drag is learned only when neither driving nor braking
    kSlow = 1U << 5,              // too slow for aerodynamic forces to stand out of the sensors' errors
    kFlapOpen = 1U << 6,          // flap not closed
    kReattaching = 1U << 7,       // a closing is being judged
    kSensorDistrusted = 1U << 8,  // at least one channel is left out of the fusion
};

// States of the car in the vertical filter that are smoothed after the outing (slow_snapshot.hpp names them).
inline constexpr std::size_t kSlowCount = 16;

struct Estimate {
    std::int64_t time_ns = 0;
    std::uint32_t flags = kNotConverged;
    double speed_mps = 0.0;      // over ground, filtered
    double air_speed_mps = 0.0;  // what the areas refer to; equals speed_mps under kGroundReference
    double air_density_kgpm3 = 0.0;
    Quantity cla_front_m2;
    Quantity cla_rear_m2;
    Quantity cda_m2;
    Quantity attached;  // share of the flap's downforce that is there, 0..1
    Quantity downforce_front_n;
    Quantity downforce_rear_n;
    Quantity drag_n;
    // For the smoother: derivative of cla_front_m2 and cla_rear_m2 with each slow state, and the part of
    // their variances that the slow states do not carry.
    std::array<double, kSlowCount> front_by_slow{};
    std::array<double, kSlowCount> rear_by_slow{};
    double front_other_variance = 0.0;
    double rear_other_variance = 0.0;
    Quantity flap_area_m2;  // rear downforce area that the flap switches
};

enum class Verdict : std::uint8_t { full, short_of, unclear };

// One closing of the flap. "known" flags say which parts the data could tell; the rest is not to be printed.
struct Closure {
    std::uint32_t number = 0;  // 1, 2, ...
    std::int32_t lap = 0;
    std::int32_t zone = 0;  // 0: no braking followed
    double time_command_s = 0.0;
    double time_closed_s = 0.0;
    double speed_mps = 0.0;  // at the command
    double closing_time_s = 0.0;
    double lap_distance_brake_m = 0.0;  // NaN where there is no lap distance
    bool reattachment_known =
        false;  // false: data were missing; tau, t95, plateau, probabilities mean nothing
    Quantity tau_s;
    double t95_s = 0.0;      // after time_closed, posterior median
    double t95_low_s = 0.0;  // 95 % credible interval
    double t95_high_s = 0.0;
    double plateau = 1.0;  // share of the flap's downforce that comes back at all
    bool whole = true;     // false: settles short of whole; t95 and t95_high mean nothing
    bool braked = false;   // brakes came within 3 s; the fields below need it
    double time_brake_s = 0.0;
    Quantity margin_s;             // time_brake - (time_closed + t95)
    Quantity shortfall_n;          // downforce missing at brake onset
    double shortfall_share = 0.0;  // over the rear downforce with attached flow
    double probability_short = 0.0;
    double probability_slow = 0.0;
    bool usual_known = false;  // enough earlier closings to know the car's own usual
    bool slow = false;
    Verdict verdict = Verdict::unclear;
    double flap_downforce_n = 0.0;  // the flap's downforce at time_closed
};

enum class AlarmKind : std::uint8_t {
    short_at_brakes,    // probability_short over its limit at brake onset
    unknown_at_brakes,  // the same could not be computed: never read as "fine"
    slow_reattachment,  // a closing flagged slow or short of whole
    data_stale,         // needed data stopped coming
    sensor_distrusted,  // channel left out of the fusion
};

struct Alarm {
    AlarmKind kind = AlarmKind::data_stale;
    std::int64_t time_ns = 0;          // source time that it speaks of
    std::uint32_t closure = 0;         // number of the closing, 0 where it is none's
    Channel channel = Channel::speed;  // for sensor_distrusted and data_stale
    double probability = 0.0;          // for short_at_brakes and slow_reattachment
    Quantity shortfall_n;              // for short_at_brakes
};

enum class FusionResult : std::uint8_t {
    not_tried,
    used,
    gated,
    out_of_range,
    not_finite,
    repeated,
    distrusted
};

// Status record of one measurement: what came, what was expected, and what was done with it.
struct MeasurementStatus {
    std::int64_t time_ns = 0;
    double value = 0.0;  // SI
    double predicted = 0.0;
    double innovation = 0.0;
    double innovation_variance = 0.0;
    double test_ratio = 0.0;  // innovation^2 / (gate^2 variance); over 1 is gated
    FusionResult result = FusionResult::not_tried;
};

enum class Trust : std::uint8_t { absent, good, distrusted };
enum class Fault : std::uint8_t { none, gone, stuck, jumped, drifting, noisy, disagrees };

struct ChannelHealth {
    std::uint64_t samples = 0;
    std::uint64_t gaps = 0;     // pauses of more than three usual intervals
    std::uint64_t repeats = 0;  // a sample with the time of the one before
    std::uint64_t not_finite = 0;
    std::uint64_t out_of_range = 0;
    std::uint64_t gated = 0;  // refused by the innovation gate
    double interval_s = 0.0;  // usual interval between samples
    std::int64_t last_time_ns = 0;
    double last_value = 0.0;
    Trust trust = Trust::absent;
    Fault fault = Fault::none;
    std::int64_t since_ns = 0;  // source time since which trust holds
    MeasurementStatus status;   // newest
};

using HealthTable = std::array<ChannelHealth, kChannelCount>;

}  // namespace holdfast::core
