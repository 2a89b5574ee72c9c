// SPDX-License-Identifier: MIT
#include <chrono>
#include <memory>
#include <thread>

#include "estimator/commands/commands.hpp"
#include "estimator/commands/open.hpp"
#include "estimator/commands/stage.hpp"
#include "estimator/session/interrupt.hpp"
#include "proto/vocabulary/exit_status.hpp"

namespace holdfast::commands {

namespace {

// The log has been read; the page stays for those who look at it.
void keep_page(const wall::Wall& wall, Stage& stage) {
    if (!wall.server) return;
    stage.remark("the page stays until Ctrl-C");
    while (!session::interrupted()) {
        stage.attend_page();
        std::this_thread::sleep_for(std::chrono::milliseconds(50));
    }
}

}  // namespace

int replay(const ReplayOptions& options) {
    const auto car_file = read_car(options.results.car);
    const auto source = open(options.log, options.channels, options.strict);
    if (!car_file || source == nullptr) return kFailed;
    const auto bound = bind(*car_file, source->info());
    if (!bound) return kFailed;

    wall::Wall wall;
    open_page(wall, options.results);
    Stage stage(*car_file, *bound, source->info(), {.name = options.log}, options.results.out,
                options.results, wall, nullptr);
    session::note_interrupts();
    Frame frame;
    while (!session::interrupted() && source->next(frame)) {
        stage.step(frame);
        stage.set_progress(source->progress());
    }
    if (session::interrupted()) {
        stage.finish(false, session::interrupt_reason());
        return kIncomplete;
    }
    if (const auto& error = source->error()) {
        stage.remark("error: " + session::to_string(*error));
        stage.finish(false, session::to_string(*error));
        keep_page(wall, stage);
        return kIncomplete;
    }
    stage.finish(true);
    keep_page(wall, stage);
    return kDone;
}

}  // namespace holdfast::commands
