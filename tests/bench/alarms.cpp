// SPDX-License-Identifier: MIT
// How often the wall's alarm rail asks for a person, on long outings of the simulated car without a fault:
// alarms put up in ten minutes, true ones beside false ones. The aim for an operator's whole rail is at most
// one in ten minutes (ISA-18.2 and IEC 62682 give that order of magnitude for what is manageable; memory).
//   bench_alarms [--seeds N] [--first SEED] [--each] [SCENARIO...]    scenarios as `carnode drive` takes them
// A person acknowledges each alarm five seconds after it has come, so that it may come again. An alarm is
// true where the truth says so: short, more of the rear downforce missing at the brakes than the limit; slow,
// drawn slower than usual or settling short of whole. No sensor is spoilt here: each distrust is a false one.
#include <array>
#include <cmath>
#include <cstdio>
#include <cstdlib>
#include <deque>
#include <exception>
#include <map>
#include <stdexcept>
#include <string>
#include <vector>

#include "estimator/core/settings.hpp"
#include "estimator/outputs/run.hpp"
#include "estimator/outputs/text.hpp"
#include "estimator/outputs/words.hpp"
#include "estimator/wall/alarm_rail.hpp"
#include "firmware_host/car/outing.hpp"
#include "tests/bench/accuracy/outing_run.hpp"

namespace {

using namespace holdfast;

constexpr std::int64_t kSecond_ns = 1'000'000'000;
constexpr std::int64_t kAnswer_ns = 5 * kSecond_ns;
constexpr std::size_t kKinds = 5;

struct PutUp {
    core::AlarmKind kind;
    std::uint32_t closure;
    double time_s;
    double probability;
    Channel channel;
};

// Feeds a rail as the wall's observer does, and answers its alarms.
class Operator : public outputs::Sink {
  public:
    void on_begin(outputs::Inquiry& inquiry) override { inquiry_ = &inquiry; }
    void on_frame(const Frame& frame) override {
        now_ns_ = frame.time_ns;
        if (now_ns_ < next_row_ns_) return;
        next_row_ns_ = now_ns_ + kSecond_ns / 50;
        rail_.see_data(now_ns_, (inquiry_->estimate().flags & core::kStale) != 0);
        if (now_ns_ >= next_health_ns_) {
            next_health_ns_ = now_ns_ + kSecond_ns / 2;
            rail_.see_health(now_ns_, inquiry_->health());
        }
        look();
        while (!unanswered_.empty() && now_ns_ - unanswered_.front().since_ns >= kAnswer_ns) {
            (void)rail_.acknowledge(unanswered_.front().id, outputs::seconds(now_ns_));
            unanswered_.pop_front();
        }
    }
    void on_closure(const core::Closure& closure) override {
        closures[closure.number] = closure;
        rail_.see_closure(closure);
        look();
    }
    void on_alarm(const core::Alarm& alarm) override {
        rail_.raise(alarm);
        look();
    }

    std::map<std::uint32_t, core::Closure> closures;
    std::vector<PutUp> put_up;

  private:
    struct Unanswered {
        std::uint32_t id;
        std::int64_t since_ns;
    };

    void look() {
        for (const wall::AlarmRail::Change& change : rail_.take_changes()) {
            const wall::RailAlarm& a = change.alarm;
            if (a.id <= newest_) continue;
            newest_ = a.id;
            put_up.push_back({a.alarm.kind, a.alarm.closure, outputs::seconds(a.alarm.time_ns),
                              a.alarm.probability, a.alarm.channel});
            unanswered_.push_back({a.id, now_ns_});
        }
    }

    outputs::Inquiry* inquiry_ = nullptr;
    wall::AlarmRail rail_;
    std::deque<Unanswered> unanswered_;
    std::uint32_t newest_ = 0;
    std::int64_t now_ns_ = 0, next_row_ns_ = 0, next_health_ns_ = 0;
};

struct Count {
    std::array<int, kKinds> right{}, wrong{};
    double minutes = 0.0;
    int closings = 0;

    void add(const Count& other) {
        for (std::size_t k = 0; k < kKinds; ++k) {
            right[k] += other.right[k];
            wrong[k] += other.wrong[k];
        }
        minutes += other.minutes;
        closings += other.closings;
    }
};

const sim::TruthClosure* truth_of(const core::Closure& closure, const std::vector<sim::TruthClosure>& truth) {
    for (const sim::TruthClosure& t : truth)
        if (std::abs(t.time_closed_s - closure.time_closed_s) < 0.15) return &t;
    return nullptr;
}

bool is_true(const PutUp& alarm, const sim::TruthClosure* truth) {
    if (truth == nullptr) return false;
    if (alarm.kind == core::AlarmKind::short_at_brakes)
        return truth->missing_share > core::Settings{}.short_share_limit;
    return alarm.kind == core::AlarmKind::slow_reattachment && (truth->slow || truth->plateau < 1.0);
}

Count drive(const std::string& scenario, std::uint64_t seed, bool each) {
    sim::Outing outing(sim::make_scenario(scenario, seed));
    const core::Car car = bench::workshop_car(outing);
    Operator person;
    outputs::Run run(car, core::Settings{}, outputs::kDefaultRateHz, {&person});
    Frame frame;
    std::int64_t last_ns = 0;
    while (outing.next(frame)) {
        run.step(frame);
        last_ns = frame.time_ns;
        frame = Frame{};
    }
    run.finish(true);

    Count count;
    count.minutes = outputs::seconds(last_ns) / 60.0;
    count.closings = static_cast<int>(person.closures.size());
    for (const PutUp& alarm : person.put_up) {
        const auto found = person.closures.find(alarm.closure);
        const sim::TruthClosure* truth =
            found == person.closures.end() ? nullptr : truth_of(found->second, outing.closures());
        const bool right = is_true(alarm, truth);
        ++(right ? count.right : count.wrong)[static_cast<std::size_t>(alarm.kind)];
        if (!each) continue;
        std::printf("  %s #%llu  %.1f s  %s  %s  p %.2f", scenario.c_str(),
                    static_cast<unsigned long long>(seed), alarm.time_s,
                    std::string(outputs::word(alarm.kind)).c_str(), right ? "true" : "FALSE",
                    alarm.probability);
        if (truth != nullptr)
            std::printf("  closing %u: %.3f of the rear missing, t95 %.0f ms, judged %.0f ms", alarm.closure,
                        truth->missing_share, 1e3 * truth->t95_s, 1e3 * found->second.t95_s);
        else if (alarm.kind == core::AlarmKind::sensor_distrusted)
            std::printf("  %s", std::string(info(alarm.channel).name).c_str());
        std::printf("\n");
    }
    return count;
}

void print_row(const std::string& name, const Count& c) {
    const auto in_ten = [&](int n) { return 10.0 * n / c.minutes; };
    int right = 0, wrong = 0;
    for (std::size_t k = 0; k < kKinds; ++k) {
        right += c.right[k];
        wrong += c.wrong[k];
    }
    std::printf("%-28s %7.1f %8d %8.2f %8.2f ", name.c_str(), c.minutes, c.closings, in_ten(right),
                in_ten(wrong));
    for (std::size_t k = 0; k < kKinds; ++k) std::printf("   %3d / %-3d", c.right[k], c.wrong[k]);
    std::printf("\n");
    std::fflush(stdout);
}

std::vector<std::string> healthy_outings() {
    std::vector<std::string> all;
    for (const char* family : {"open_wheel", "prototype", "heavy_closed"})
        for (const char* variant :
             {"", "-windy", "-rough", "-noisy", "-full", "-bare", "-first", "-point", "-tail", "-peaked"})
            all.push_back(std::string(family) + variant + "-healthy-long");
    return all;
}

std::uint64_t number(const std::string& option, const char* text) {
    char* end = nullptr;
    const std::uint64_t value = std::strtoull(text, &end, 10);
    if (*end != '\0' || value == 0)
        throw std::invalid_argument(option + " \"" + text + "\": expected a whole number from 1");
    return value;
}

}  // namespace

int main(int argc, char** argv) try {
    std::uint64_t seeds = 1, first = 1;
    bool each = false;
    std::vector<std::string> scenarios;
    for (int i = 1; i < argc; ++i) {
        const std::string word = argv[i];
        if ((word == "--seeds" || word == "--first") && i + 1 < argc) {
            (word == "--seeds" ? seeds : first) = number(word, argv[++i]);
        } else if (word == "--each") {
            each = true;
        } else if (word.starts_with("--")) {
            throw std::invalid_argument("option \"" + word + "\" is not known, or its value is missing");
        } else {
            scenarios.push_back(word);
        }
    }
    if (scenarios.empty()) scenarios = healthy_outings();
    std::printf("seeds %llu to %llu\n%-28s %7s %8s %8s %8s   true / false of each kind\n",
                static_cast<unsigned long long>(first), static_cast<unsigned long long>(first + seeds - 1),
                "scenario", "minutes", "closings", "true/10", "false/10");
    std::printf("%-64s", "");
    for (std::size_t k = 0; k < kKinds; ++k)
        std::printf(" %s%s", k > 0 ? "; " : "",
                    std::string(outputs::word(static_cast<core::AlarmKind>(k))).c_str());
    std::printf("\n");
    Count all;
    for (const std::string& scenario : scenarios) {
        Count group;
        for (std::uint64_t seed = first; seed < first + seeds; ++seed) group.add(drive(scenario, seed, each));
        print_row(scenario, group);
        all.add(group);
    }
    print_row("all", all);
    return 0;
} catch (const std::exception& e) {
    std::fprintf(stderr, "bench_alarms: %s\n", e.what());
    return 1;
}
