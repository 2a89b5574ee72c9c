// SPDX-License-Identifier: MIT
#include <cstdio>
#include <filesystem>
#include <iostream>
#include <optional>
#include <string>
#include <vector>

#include "estimator/commands/commands.hpp"
#include "estimator/commands/open.hpp"
#include "estimator/commands/stage.hpp"
#include "estimator/outputs/line_file.hpp"
#include "estimator/outputs/run.hpp"
#include "estimator/outputs/settling.hpp"
#include "estimator/session/bind.hpp"
#include "estimator/session/interrupt.hpp"
#include "proto/vocabulary/exit_status.hpp"

namespace holdfast::commands {
namespace {

struct AtTheEnd final : outputs::Sink {
    std::optional<core::Learned> learned;
    void on_end(const outputs::RunEnd& end) override { learned = end.learned; }
};

// Written, and read back as a car file.
bool write_proposal(const SettleOptions& options, const std::vector<outputs::Comparison>& comparisons) {
    std::error_code no_such_file;
    if (std::filesystem::equivalent(options.out, options.car, no_such_file)) {
        std::cerr << "error: " << options.out << " is the car file itself; expected another name\n";
        return false;
    }
    const auto text = session::changed_car_file(options.car, outputs::proposals(comparisons));
    if (!text) {
        tell(text.errors());
        return false;
    }
    outputs::write_whole(options.out, *text);
    return read_car(options.out).has_value();
}

void report(const SettleOptions& options, const core::Learned& learned,
            const std::vector<outputs::Comparison>& comparisons) {
    std::size_t disagreements = 0, changes = 0;
    for (const bool apart : {true, false}) {
        bool first = true;
        for (const outputs::Comparison& c : comparisons) {
            if (c.disagrees() != apart) continue;
            if (first)
                std::cout << (apart ? "File and data disagree by more than they should:\n"
                                    : "Within their uncertainties:\n");
            first = false;
            std::cout << "  " << outputs::sentence(c) << '\n';
            disagreements += apart ? 1 : 0;
            changes += apart && !c.key.empty() ? 1 : 0;
        }
    }
    if (!learned.front.rate_npm || !learned.rear.rate_npm)
        std::cout << "Wheel rates unknown: half a minute of straights with sound loads and ride heights is "
                     "needed.\n";
    if (disagreements == 0) std::cout << "Nothing that the file says is contradicted.\n";
    if (options.out.empty()) return;
    std::cout << "Proposed: " << options.out << ", " << changes << (changes == 1 ? " value" : " values")
              << " changed; weigh it before you use it.\n";
}

}  // namespace

int settle(const SettleOptions& options) {
    const auto car_file = read_car(options.car);
    const auto source = open(options.log, options.channels, options.strict);
    if (!car_file || source == nullptr) return kFailed;
    const auto bound = bind(*car_file, source->info());
    if (!bound) return kFailed;

    AtTheEnd end;
    outputs::Run run(bound->car, core::Settings{}, outputs::kDefaultRateHz, {&end});
    session::FrameAdapter adapter(bound->car);
    session::note_interrupts();
    Frame frame;
    while (!session::interrupted() && source->next(frame)) {
        adapter.apply(frame);
        run.step(frame);
    }
    const bool complete = !session::interrupted() && !source->error();
    run.finish(complete);
    if (!complete)
        std::cerr << "error: "
                  << (session::interrupted() ? session::interrupt_reason()
                                             : session::to_string(*source->error()))
                  << "\nwhat follows is from what was read until then\n";
    if (!end.learned) {
        std::cerr << "error: " << options.log << ": no frame that could be used\n";
        return kFailed;
    }
    const auto comparisons = outputs::compare(bound->car, *end.learned);
    if (!options.out.empty() && !write_proposal(options, comparisons)) return kFailed;
    report(options, *end.learned, comparisons);
    return complete ? kDone : kIncomplete;
}

}  // namespace holdfast::commands
