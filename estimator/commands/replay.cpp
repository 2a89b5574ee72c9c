// SPDX-License-Identifier: MIT
#include <iostream>
#include <memory>

#include "estimator/commands/commands.hpp"
#include "estimator/commands/open.hpp"
#include "estimator/commands/stage.hpp"
#include "estimator/session/interrupt.hpp"
#include "proto/vocabulary/exit_status.hpp"

namespace holdfast::commands {

int replay(const ReplayOptions& options) {
    const auto car_file = read_car(options.results.car);
    const auto source = open(options.log, options.channels, options.strict);
    if (!car_file || source == nullptr) return kFailed;
    const auto bound = bind(*car_file, source->info());
    if (!bound) return kFailed;

    Stage stage(*car_file, *bound, source->info(), options.log, options.results.out, options.results,
                nullptr);
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
        return kIncomplete;
    }
    stage.finish(true);
    return kDone;
}

}  // namespace holdfast::commands
