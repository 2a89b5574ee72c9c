// SPDX-License-Identifier: MIT
#include "firmware_host/car/car_file.hpp"

#include <cstdio>
#include <numbers>

#include "firmware_host/car/random.hpp"

namespace holdfast::sim {
namespace {

// Writes keys with the workshop's errors. The standard uncertainties are the car file's defaults.
class Workshop {
  public:
    Workshop(std::uint64_t seed, double scale) : random_(seed, Stream::workshop), scale_(scale) {}

    void heading(const char* name) { text_ += std::string("\n[") + name + "]\n"; }
    void exact(const char* key, double value) { line(key, value); }
    void relative(const char* key, double value, double sd_share) {
        line(key, value * (1.0 + error(sd_share)));
    }
    void absolute(const char* key, double value, double sd) { line(key, value + error(sd)); }
    double error(double sd) { return scale_ * sd * random_.normal(); }
    std::string& text() { return text_; }

  private:
    void line(const char* key, double value) {
        char line_text[96];
        std::snprintf(line_text, sizeof line_text, "%s = %#.7g\n", key, value);
        text_ += line_text;
    }

    Random random_;
    double scale_;
    std::string text_;
};

// Damping as a workshop quotes it: mean of bump and rebound at the knee, force over speed.
double quoted_damping(const AxleParameters& axle) {
    const double share = axle.damping_fast_share + 0.5 * (1.0 - axle.damping_fast_share);
    return 0.5 * (axle.damping_bump_nspm + axle.damping_rebound_nspm) * share;
}

void write_axle(Workshop& workshop, const AxleParameters& axle) {
    workshop.exact("track", axle.track_m);
    workshop.relative("unsprung_mass", axle.unsprung_mass_kg, 0.05);
    workshop.relative("wheel_rate", axle.wheel_rate_npm, 0.03);
    workshop.relative("anti_roll_rate", axle.anti_roll_rate_npm, 0.05);
    workshop.relative("damping", quoted_damping(axle), 0.15);
    workshop.relative("tyre_rate", axle.tyre_rate_npm, 0.05);
}

}  // namespace

std::string car_file_text(const Scenario& scenario, double error_scale) {
    const ChassisParameters& car = scenario.chassis;
    Workshop workshop(scenario.seed, error_scale);
    workshop.text() = "# SI units. Values as a workshop would have measured them.\n[car]\nname = \"" +
                      scenario.car_name + "\"\n";
    workshop.relative("mass", car.mass_kg, 0.005);
    workshop.relative("fuel_per_lap", car.fuel_per_lap_kg, 0.10);
    workshop.exact("wheelbase", car.wheelbase_m);
    workshop.relative("front_weight_share", car.front_weight_share, 0.004);
    workshop.relative("cg_height", car.cg_height_m, 0.05);
    workshop.relative("pitch_inertia", car.pitch_inertia_kgm2, 0.10);
    workshop.relative("roll_inertia", car.roll_inertia_kgm2, 0.10);
    workshop.relative("rolling_resistance", car.rolling_resistance, 0.10);
    workshop.heading("front");
    write_axle(workshop, car.front);
    workshop.absolute("anti_dive", car.front.anti_brake_share, 0.03);
    workshop.heading("rear");
    write_axle(workshop, car.rear);
    workshop.absolute("anti_lift", car.rear.anti_brake_share, 0.03);
    workshop.absolute("anti_squat", car.rear.anti_squat_share, 0.03);
    workshop.heading("flap");
    workshop.exact("chord", scenario.flap.chord_m);
    constexpr double kDegrees = 180.0 / std::numbers::pi;
    workshop.absolute("closed_angle", scenario.flap.angle_closed_rad * kDegrees, 0.3);
    workshop.absolute("open_angle", scenario.flap.angle_open_rad * kDegrees, 0.3);
    workshop.heading("ride_height");
    for (const RideHeightPlace& place : scenario.ride_heights) {
        char line[160];
        std::snprintf(line, sizeof line, "%s = { static = %.5f, x = %.3f, y = %.3f }\n", place.name.c_str(),
                      place.static_m + workshop.error(0.0005), place.x_m, place.y_m);
        workshop.text() += line;
    }
    workshop.relative("tyre_growth", car.tyre_growth_s2pm, 0.20);
    return workshop.text();
}

}  // namespace holdfast::sim
