// SPDX-License-Identifier: MIT
// One closing of the flap from its command to its record: runs the bank, judges at the brakes' onset, and
// writes the Closure when nothing more can come.
#pragma once

#include <array>
#include <cstdint>
#include <optional>

#include "estimator/core/bank.hpp"
#include "estimator/core/posterior.hpp"
#include "estimator/core/regrowth.hpp"
#include "estimator/core/results.hpp"
#include "estimator/core/settings.hpp"
#include "estimator/core/usual.hpp"

namespace holdfast::core {

// The car at one instant, as the judgement of a shortfall needs it.
struct AeroNow {
    double time_s = 0.0;
    double speed_mps = 0.0;
    double dynamic_pressure_pa = 0.0;
    double front_per_rear = 0.0;         // the flap's front area over its rear area
    double rear_area_attached_m2 = 0.0;  // with the flow wholly back
    double rear_area_sd_m2 = 0.0;
    std::int32_t lap = 0;
    bool reliable = false;  // loads and heights are there and the filter has converged
};

// The missing share as the mixture of candidates sees it now.
struct MissingNow {
    double area_m2 = 0.0;  // rear
    double area_sd_m2 = 0.0;
    double share = 0.0;  // over the flap's size
    double share_sd = 0.0;
};

class ClosureTracker {
  public:
    explicit ClosureTracker(const Settings& settings) : settings_(settings) {}

    void begin(const AeroNow& now, double time_command_s, double chord_m, ChassisFilter::Filter& filter);
    // The flap is shut.
    void shut(double time_moved_s, double time_shut_s);
    // The brakes came on. Judges at once where a closing waits for it.
    void brakes(double time_brake_s, std::int32_t zone, double lap_distance_m, const AeroNow& now);
    // Time passes: renews the weights, looks again at a shortfall, ends the window, closes the record.
    void tick(const AeroNow& now, double colour, ChassisFilter::Filter& filter);
    // The data broke off or the flap was opened again: whatever runs ends here.
    void end(const AeroNow& now, double colour, ChassisFilter::Filter& filter, bool data_lost);

    [[nodiscard]] ReattachmentBank& bank() { return bank_; }
    [[nodiscard]] bool waiting() const { return waiting_; }
    [[nodiscard]] const MissingNow& missing() const { return missing_; }
    // Deviation of a state's mixture mean from the base path, while the bank runs.
    [[nodiscard]] double mean_deviation(std::size_t state, const ChassisFilter::Filter& filter) const;
    // Share that stayed detached after the newest closing, until the flap opens again.
    [[nodiscard]] double stays_share() const { return stays_share_; }
    // A new opening takes the rest of the flow away and gives the next closing its chance.
    void flap_opens(ChassisFilter::Filter& filter);

    // Where the flap is, for the picture of the closing.
    void flap_moved(double time_s, double position);
    // The newest closing's curve; false where there was none.
    [[nodiscard]] bool regrowth(Regrowth& out);

    [[nodiscard]] std::optional<Closure> take_closure();
    [[nodiscard]] std::optional<Alarm> take_alarm();

  private:
    void weigh(double colour);
    void finish_bank(const AeroNow& now, double colour, ChassisFilter::Filter& filter);
    void describe_reattachment();
    void move_stay_into_area(ChassisFilter::Filter& filter);
    void judge_shortfall();
    void publish();

    Settings settings_;
    ReattachmentBank bank_;
    Usual usual_;
    CandidateWeights weights_;
    Posterior posterior_;
    WeightedValues sorted_;
    MissingNow missing_;
    bool waiting_ = false;  // a closing has begun and its record is not out yet
    bool shut_ = false;
    bool alarmed_ = false;
    bool usable_ = false;  // data were good through the window
    std::uint64_t sources_ =
        0;  // at the command: one that is lost or comes back meanwhile spoils the judgement
    double next_weigh_s_ = 0.0;
    double stays_share_ = 0.0;
    double stays_area_m2_ = 0.0;
    double colour_ = 1.0;
    double chord_m_ = 0.0;
    double known_until_s_ = 0.0;
    std::array<double, Regrowth::kFlapPoints> flap_time_s_{};
    std::array<double, Regrowth::kFlapPoints> flap_position_{};
    std::size_t flap_count_ = 0;
    AeroNow at_brake_;
    Closure closure_;
    std::uint32_t count_ = 0;
    std::optional<Closure> closure_out_;
    std::optional<Alarm> alarm_out_, slow_alarm_out_;
};

}  // namespace holdfast::core
