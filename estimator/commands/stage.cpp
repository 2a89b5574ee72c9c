// SPDX-License-Identifier: MIT
#include "estimator/commands/stage.hpp"

#include <unistd.h>

#include <cstdlib>
#include <iostream>
#include <utility>

#include "estimator/commands/cautions.hpp"

namespace holdfast::commands {
namespace {

// https://no-color.org: set and not empty means no colour.
outputs::Style output_style() {
    const char* no_color = std::getenv("NO_COLOR");
    const bool unwanted = no_color != nullptr && *no_color != '\0';
    return ::isatty(STDOUT_FILENO) == 1 && !unwanted ? outputs::Style::colour : outputs::Style::plain;
}

std::ostream* status_stream() {
    return ::isatty(STDERR_FILENO) == 1 ? &std::cerr : nullptr;
}

std::vector<outputs::Sink*> chosen(outputs::Folder& folder, outputs::Sink& shown, outputs::Sink& observer,
                                   outputs::Sink* also) {
    std::vector<outputs::Sink*> sinks{&folder, &shown, &observer};
    if (also != nullptr) sinks.push_back(also);
    return sinks;
}

wall::Hello hello(const outputs::Outing& outing, const core::Car& car, const Input& input, bool smoothed) {
    return {.car_name = outing.car_name,
            .origin = input.name,
            .live = input.live,
            .smoothed = smoothed,
            .stream = input.stream,
            .flap_chord_m = outing.flap_chord_m,
            .mass_kg = car.mass_kg,
            .fuel_per_lap_kg = car.fuel_per_lap_kg,
            .settings = core::Settings{},
            .cautions = {kCautionSentences.begin(), kCautionSentences.end()},
            .channels = outing.stream};
}

}  // namespace

Stage::Stage(const session::CarFile& car_file, const session::BoundCar& bound, const StreamInfo& stream,
             const Input& input, const std::filesystem::path& folder, const ResultOptions& options,
             wall::Wall& wall, outputs::Sink* also)
    : adapter_(bound.car),
      folder_(folder, {.log = input.name,
                       .car_name = car_file.name,
                       .car_file = car_file.file,
                       .flap_chord_m = bound.car.flap_chord_m,
                       .rate_hz = options.rate_hz,
                       .stream = stream}),
      terminal_(std::cout, status_stream(), output_style(), folder_),
      json_lines_(std::cout, folder_),
      observer_(
          folder_,
          hello(folder_.outing(), bound.car, input, options.knowledge == outputs::Knowledge::of_the_outing),
          wall),
      sinks_(chosen(folder_, options.json ? static_cast<outputs::Sink&>(json_lines_) : terminal_, observer_,
                    also)),
      run_(bound.car, core::Settings{}, options.rate_hz, sinks_, options.knowledge) {}

void Stage::step(Frame& frame) {
    adapter_.apply(frame);
    run_.step(frame);
}

void Stage::finish(bool complete, const std::string& reason) {
    run_.finish(complete, reason);
}

void Stage::raise(const core::Alarm& alarm) {
    for (outputs::Sink* sink : sinks_) sink->on_alarm(alarm);
}

void Stage::remark(const std::string& line) {
    terminal_.clear_status();
    std::cerr << line << std::endl;
}

std::optional<session::CarFile> read_car(const std::string& path) {
    auto car = session::read_car_file(path);
    if (car) return std::move(*car);
    tell(car.errors());
    return std::nullopt;
}

std::optional<session::BoundCar> bind(const session::CarFile& car_file, const StreamInfo& stream) {
    auto bound = session::bind_ride_heights(car_file, stream);
    if (!bound) {
        tell(bound.errors());
        return std::nullopt;
    }
    for (const std::string& name : bound->sensors_without_channel)
        std::cerr << "note: the log has no ride_height_" << name << ", which the car file places\n";
    for (const std::string& name : bound->channels_without_sensor)
        std::cerr << "note: ride_height_" << name << " is left out: " << car_file.file
                  << " does not say where it sits\n";
    return std::move(*bound);
}

void open_page(wall::Wall& wall, const ResultOptions& options) {
    if (options.page.empty()) return;
    wall.server = std::make_unique<wall::Server>(wall::ServerOptions{.listen = options.page});
    std::cerr << "page at " << wall.server->url() << std::endl;
}

void tell(const session::Errors& errors) {
    for (const session::Error& error : errors) std::cerr << "error: " << session::to_string(error) << '\n';
}

}  // namespace holdfast::commands
