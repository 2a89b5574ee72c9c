// SPDX-License-Identifier: MIT
// One outing of the simulated car: frames in the order of their time, as its sensors would log them, and the
// truth behind them.
//
//     Outing outing(make_scenario("open_wheel", 7));
//     Frame frame;
//     while (outing.next(frame)) { ... }
//
// The same scenario gives the same frames to the bit.
#pragma once

#include <memory>
#include <vector>

#include "firmware_host/car/car_file.hpp"
#include "firmware_host/car/scenario.hpp"
#include "firmware_host/car/truth.hpp"
#include "proto/vocabulary/frame.hpp"

namespace holdfast::sim {

class Outing {
  public:
    // Throws std::invalid_argument that names the parameter which makes no car.
    explicit Outing(const Scenario& scenario);
    ~Outing();
    Outing(Outing&&) noexcept;
    Outing& operator=(Outing&&) noexcept;

    // Names of the ride heights, channels that are fitted, and what is driven where by which seed.
    [[nodiscard]] const StreamInfo& info() const;
    [[nodiscard]] const Scenario& scenario() const;

    // The next frame; false, and the frame untouched, when the last lap is over.
    [[nodiscard]] bool next(Frame& frame);

    // Truth up to the newest frame. A closing is listed once its reattachment and its braking are over; all
    // are, after the last frame.
    [[nodiscard]] const std::vector<TruthSample>& truth() const;
    [[nodiscard]] const std::vector<TruthClosure>& closures() const;

    // True values of the channels at the newest frame, before the sensors' errors.
    [[nodiscard]] const TrueValues& true_values() const;

  private:
    class Car;
    std::unique_ptr<Car> car_;
};

}  // namespace holdfast::sim
