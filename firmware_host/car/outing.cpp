// SPDX-License-Identifier: MIT
#include "firmware_host/car/outing.hpp"

#include <cmath>
#include <numbers>

#include "firmware_host/car/aero.hpp"
#include "firmware_host/car/chassis.hpp"
#include "firmware_host/car/check.hpp"
#include "firmware_host/car/circuit.hpp"
#include "firmware_host/car/driver.hpp"
#include "firmware_host/car/flap.hpp"
#include "firmware_host/car/road.hpp"
#include "firmware_host/car/truth_recorder.hpp"
#include "firmware_host/car/wind.hpp"

namespace holdfast::sim {
namespace {

constexpr double kLongestStepS = 0.0005;
constexpr double kTruthRateHz = 50.0;
constexpr double kRoadMarginM = 1.5;  // of sensors ahead of the front axle and behind the rear axle

// Areas by which the driver plans: floor low at the front, at its best at the rear.
Capability capability(const Scenario& s) {
    const Areas low = areas(s.aero, s.flap, s.chassis.wheelbase_m, 0.6 * s.aero.floor_front_m,
                            0.7 * s.aero.floor_rear_m, 0.0, 1.0);
    const Areas open = areas(s.aero, s.flap, s.chassis.wheelbase_m, 0.5 * s.aero.floor_front_m,
                             0.7 * s.aero.floor_rear_m, 0.0, 0.0);
    return {s.chassis.mass_kg, low.front_m2 + low.rear_m2, open.drag_m2, air_density(s.air)};
}

StreamInfo stream_info(const Scenario& scenario) {
    StreamInfo info;
    for (const RideHeightPlace& place : scenario.ride_heights) info.ride_height_names.push_back(place.name);
    for (std::size_t i = 0; i < kChannelCount; ++i) {
        if (scenario.sensors[i].fitted) info.channels |= std::uint64_t{1} << i;
    }
    info.origin = "simulated car: " + scenario.car_name + " on the " + scenario.circuit.name + " (" +
                  scenario.name + ", seed " + std::to_string(scenario.seed) + ")";
    return info;
}

}  // namespace

// Everything that moves.
class Outing::Car {
  public:
    explicit Car(const Scenario& s)
        : scenario(checked(s)),
          info(stream_info(s)),
          steps_per_frame(static_cast<int>(std::ceil(1.0 / (s.frame_rate_hz * kLongestStepS) - 1e-9))),
          dt_s(1.0 / (s.frame_rate_hz * steps_per_frame)),
          steps_per_truth(std::llround(1.0 / (kTruthRateHz * dt_s))),
          density(air_density(s.air)),
          circuit(s.circuit),
          driver(s, circuit, capability(s)),
          chassis(s.chassis),
          flap(s.flap),
          road(s.road, s.circuit.kerbs, circuit.length_m(), s.chassis.wheelbase_m + kRoadMarginM,
               kRoadMarginM, s.seed),
          wind(s.air, s.seed),
          sensors(s.sensors, s.faults, s.frame_rate_hz, s.seed),
          recorder(s.flap),
          speed_mps(s.driver.start_speed_mps) {
        settle();
        fill_true_values();
    }
    Car(const Car&) = delete;
    Car& operator=(const Car&) = delete;

    bool next(Frame& frame) {
        if (over) return false;
        if (tick > 0) {
            for (int i = 0; i < steps_per_frame && !over; ++i) step();
            if (over) {
                recorder.finish();
                return false;
            }
            fill_true_values();
        }
        frame = Frame{};
        frame.time_ns = std::llround(static_cast<double>(tick) * 1e9 / scenario.frame_rate_hz);
        sensors.read(tick, true_values, frame);
        ++tick;
        return true;
    }

    const Scenario scenario;
    const StreamInfo info;
    const int steps_per_frame;
    const double dt_s;
    const std::int64_t steps_per_truth;
    const double density;
    Circuit circuit;
    Driver driver;
    Chassis chassis;
    Flap flap;
    Road road;
    Wind wind;
    Sensors sensors;
    TruthRecorder recorder;
    TrueValues true_values{};

  private:
    // The car comes to rest on its springs at the first instant's speed before the log begins.
    void settle() {
        constexpr double kSettleS = 2.0;
        for (double t = 0.0; t < kSettleS; t += dt_s) bounce();
        driver_view.accel_mps2 = 0.0;
    }

    void step() {
        time_s += dt_s;
        ++steps;
        drive();
        roll_on();
        if (over) return;
        wind.step(dt_s);
        flap.step(driver.controls().flap_open, driver.closing(), air_speed_mps(), dt_s);
        bounce();
        const TruthInstant now = instant();
        recorder.watch(now);
        if (steps % steps_per_truth == 0) recorder.sample(now);
    }

    // Forces along the car: m dV/dt = drive - brake - drag - rolling - grade.
    void drive() {
        const ChassisParameters& car = scenario.chassis;
        const double mass = chassis.mass_kg();
        const double pressure_pa = dynamic_pressure_pa();
        const double weight_n = mass * kGravity + pressure_pa * (now_areas.front_m2 + now_areas.rear_m2);
        const double rear_n = mass * kGravity * (1.0 - car.front_weight_share) +
                              pressure_pa * now_areas.rear_m2 +
                              mass * std::max(0.0, accel_x_mps2) * car.cg_height_m / car.wheelbase_m;
        const double resistance_n = pressure_pa * now_areas.drag_m2 + car.rolling_resistance * weight_n +
                                    mass * kGravity * circuit.grade(lap_distance_m);
        driver_view = {time_s, speed_mps, felt_accel_mps2, lap_distance_m,
                       lap,    mass,      resistance_n,    scenario.driver.grip * 0.9 * rear_n};
        driver.step(driver_view, dt_s);
        const Controls& controls = driver.controls();
        const double brake_n = controls.brake_pressure_pa * scenario.driver.brake_gain_nppa;
        accel_x_mps2 =
            (controls.drive_force_n - brake_n - resistance_n) / (mass * (1.0 + car.rotating_mass_share));
        constexpr double kFeelS = 0.08;  // the driver does not plan by a gear change
        felt_accel_mps2 += (accel_x_mps2 - felt_accel_mps2) * dt_s / kFeelS;
    }

    void roll_on() {
        speed_mps = std::max(0.5, speed_mps + accel_x_mps2 * dt_s);
        const double driven_m = speed_mps * dt_s;
        distance_m += driven_m;
        lap_distance_m += driven_m;
        if (lap_distance_m >= circuit.length_m()) {
            lap_distance_m -= circuit.length_m();
            over = ++lap > scenario.laps;
        }
        const double wanted = circuit.segment(lap_distance_m).curvature_pm;
        curvature_pm += (wanted - curvature_pm) * std::min(1.0, driven_m / circuit.transition_m());
        course_rad -= curvature_pm * driven_m;  // clockwise: a left turn takes from it
        course_rad -= 2.0 * std::numbers::pi * std::floor(course_rad / (2.0 * std::numbers::pi));
        chassis.burn_fuel(scenario.chassis.fuel_per_lap_kg * distance_m / circuit.length_m());
    }

    // Aerodynamics, road and springs.
    void bounce() {
        const ChassisParameters& car = scenario.chassis;
        road.advance_to(distance_m);
        ChassisInput in;
        const double rear_distance_m = distance_m - car.wheelbase_m;
        in.road_m = {road.left_m(distance_m), road.right_m(distance_m), road.left_m(rear_distance_m),
                     road.right_m(rear_distance_m)};
        const double floor_front_m =
            scenario.aero.floor_front_m + chassis.rise_m(0.0, 0.0) - 0.5 * (in.road_m[0] + in.road_m[1]);
        const double floor_rear_m = scenario.aero.floor_rear_m + chassis.rise_m(-car.wheelbase_m, 0.0) -
                                    0.5 * (in.road_m[2] + in.road_m[3]);
        now_areas = areas(scenario.aero, scenario.flap, car.wheelbase_m, floor_front_m, floor_rear_m,
                          chassis.pitch_rad(), flap.attached());
        const double pressure_pa = dynamic_pressure_pa();
        in.speed_mps = speed_mps;
        in.accel_x_mps2 = accel_x_mps2;
        in.accel_y_mps2 = curvature_pm * speed_mps * speed_mps;
        in.gravity_mps2 = kGravity + circuit.dip_pm(lap_distance_m) * speed_mps * speed_mps;
        in.grade = circuit.grade(lap_distance_m);
        in.downforce_front_n = pressure_pa * now_areas.front_m2;
        in.downforce_rear_n = pressure_pa * now_areas.rear_m2;
        chassis.step(in, dt_s);
    }

    [[nodiscard]] double air_speed_mps() const { return speed_mps + wind.head_mps(course_rad); }
    [[nodiscard]] double dynamic_pressure_pa() const {
        const double air = air_speed_mps();
        return 0.5 * density * air * air;
    }

    [[nodiscard]] TruthInstant instant() const {
        return {time_s,
                speed_mps,
                air_speed_mps(),
                density,
                now_areas,
                flap.attached(),
                flap.position(),
                driver.controls().flap_open,
                driver.controls().brake_pressure_pa,
                lap,
                driver.zone_ahead(lap_distance_m),
                driver.closing()};
    }

    void fill_true_values();

    std::int64_t tick = 0;
    std::int64_t steps = 0;
    double time_s = 0.0;
    double distance_m = 0.0;
    double lap_distance_m = 0.0;
    int lap = 1;
    bool over = false;
    double speed_mps;
    double accel_x_mps2 = 0.0;
    double felt_accel_mps2 = 0.0;
    double curvature_pm = 0.0;
    double course_rad = 0.0;
    Areas now_areas;
    DriverView driver_view;
};

void Outing::Car::fill_true_values() {
    const ChassisParameters& car = scenario.chassis;
    const Controls& controls = driver.controls();
    const auto set = [this](Channel c, double value) { true_values[index(c)] = value; };
    const double slip =
        controls.brake_pressure_pa > 0.0
            ? -car.slip_brake_pn * controls.brake_pressure_pa * scenario.driver.brake_gain_nppa
            : car.slip_drive_pn * std::max(0.0, controls.drive_force_n);
    const double shake = car.vibration_mps2 * std::sin(2.0 * std::numbers::pi * car.vibration_hz * time_s);
    const double accel_y = curvature_pm * speed_mps * speed_mps;
    set(Channel::speed, speed_mps * (1.0 + slip));
    set(Channel::load_fl, chassis.suspension_load_n(kFrontLeft));
    set(Channel::load_fr, chassis.suspension_load_n(kFrontRight));
    set(Channel::load_rl, chassis.suspension_load_n(kRearLeft));
    set(Channel::load_rr, chassis.suspension_load_n(kRearRight));
    set(Channel::flap_position, flap.position());
    set(Channel::flap_angle,
        scenario.flap.angle_closed_rad +
            flap.position() * (scenario.flap.angle_open_rad - scenario.flap.angle_closed_rad));
    set(Channel::flap_command, controls.flap_open ? 1.0 : 0.0);
    set(Channel::brake_pressure, controls.brake_pressure_pa);
    set(Channel::accel_x, accel_x_mps2 + shake);
    set(Channel::accel_y, accel_y);
    set(Channel::accel_z, chassis.accel_z_mps2() + shake);
    set(Channel::throttle, controls.throttle);
    set(Channel::drive_force, controls.drive_force_n);
    set(Channel::pitot_pressure, dynamic_pressure_pa());
    set(Channel::heading, course_rad);
    set(Channel::yaw_rate, curvature_pm * speed_mps);
    set(Channel::lap, lap);
    set(Channel::lap_distance, lap_distance_m);
    set(Channel::air_temperature, scenario.air.temperature_k);
    set(Channel::air_pressure, scenario.air.pressure_pa);
    set(Channel::relative_humidity, scenario.air.relative_humidity);
    for (std::size_t i = 0; i < scenario.ride_heights.size(); ++i) {
        const RideHeightPlace& place = scenario.ride_heights[i];
        // The road between the two wheel tracks is taken to run straight across.
        const double under_m = distance_m + place.x_m;
        const double across =
            0.5 + place.y_m / (place.x_m > -0.5 * car.wheelbase_m ? car.front.track_m : car.rear.track_m);
        const double road_m = across * road.left_m(under_m) + (1.0 - across) * road.right_m(under_m);
        set(ride_height_channel(i), place.static_m + chassis.rise_m(place.x_m, place.y_m) - road_m);
    }
}

Outing::Outing(const Scenario& scenario) : car_(std::make_unique<Car>(scenario)) {}
Outing::~Outing() = default;
Outing::Outing(Outing&&) noexcept = default;
Outing& Outing::operator=(Outing&&) noexcept = default;

const StreamInfo& Outing::info() const {
    return car_->info;
}
const Scenario& Outing::scenario() const {
    return car_->scenario;
}
bool Outing::next(Frame& frame) {
    return car_->next(frame);
}
const std::vector<TruthSample>& Outing::truth() const {
    return car_->recorder.samples();
}
const std::vector<TruthClosure>& Outing::closures() const {
    return car_->recorder.closures();
}
const TrueValues& Outing::true_values() const {
    return car_->true_values;
}

}  // namespace holdfast::sim
