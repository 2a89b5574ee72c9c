// SPDX-License-Identifier: MIT
// The car's own usual closing, learned while some closings are slow ones.
#include <catch2/catch.hpp>
#include <cmath>
#include <memory>
#include <random>

#include "estimator/core/usual.hpp"

namespace {

using holdfast::core::kShapeCount;
using holdfast::core::kStartCount;
using holdfast::core::Usual;

constexpr std::array<double, kStartCount> kNoStart{};
constexpr std::array<double, kShapeCount> kNoShape{};

}  // namespace

TEST_CASE("usual t95 is found among closings of which some are slow, seeds 1 to 6") {
    const std::uint64_t seed = GENERATE(1, 2, 3, 4, 5, 6);
    const double usual_chords = GENERATE(25.0, 40.0, 60.0);
    const double slow_share = GENERATE(0.0, 0.15, 0.4);
    INFO("seed " << seed << ", usual " << usual_chords << " chords, slow " << slow_share);
    std::mt19937_64 random(seed);
    std::normal_distribution<double> normal;
    std::uniform_real_distribution<double> uniform;
    auto usual = std::make_unique<Usual>();
    for (int i = 0; i < 40; ++i) {
        const double sd = 0.05 + 0.15 * uniform(random);
        const double slow = i % 20 < 20.0 * slow_share ? std::log(2.0 + 1.5 * uniform(random)) : 0.0;
        usual->learn(std::log(usual_chords) + slow + 0.06 * normal(random) + sd * normal(random), sd,
                     kNoStart, kNoShape);
    }
    const auto found = usual->t95_chords();
    // A tenth: the limit for "slow" lies at 1.6 times the usual.
    CHECK(found.log_mean == Approx(std::log(usual_chords)).margin(0.10));
    CHECK(found.log_sd < 0.1);
    CHECK(found.log_sd > 0.0);
    CHECK(usual->count() == 40);
}

TEST_CASE("a first closing that says little changes little") {
    auto usual = std::make_unique<Usual>();
    const auto before = usual->t95_chords();
    usual->learn(std::log(120.0), 1.5, kNoStart, kNoShape);
    CHECK(std::abs(usual->t95_chords().log_mean - before.log_mean) < before.log_sd);
    CHECK(usual->t95_chords().log_sd > 0.5 * before.log_sd);
}

TEST_CASE("starts and shapes that were seen weigh more afterwards; time constants keep a peak") {
    auto usual = std::make_unique<Usual>();
    std::array<double, kStartCount> start{};
    std::array<double, kShapeCount> shape{};
    start[3] = 1.0;
    shape[2] = 1.0;
    const double shape_before = usual->shape_weight(2) / usual->shape_weight(0);
    for (int i = 0; i < 5; ++i) usual->learn(3.6, 0.1, start, shape);
    CHECK(usual->start_weight(3) > 3.0 * usual->start_weight(2));
    CHECK(usual->shape_weight(2) / usual->shape_weight(0) > 2.0 * shape_before);
    CHECK(usual->tau_weight(14.0) > usual->tau_weight(4.0));
    CHECK(usual->tau_weight(14.0) > usual->tau_weight(80.0));
}

TEST_CASE("more closings than are remembered: the oldest go, the count goes on") {
    auto usual = std::make_unique<Usual>();
    for (std::size_t i = 0; i < Usual::kCapacity; ++i) usual->learn(std::log(30.0), 0.1, kNoStart, kNoShape);
    CHECK(usual->t95_chords().log_mean == Approx(std::log(30.0)).margin(0.03));
    for (std::size_t i = 0; i < Usual::kCapacity; ++i) usual->learn(std::log(50.0), 0.1, kNoStart, kNoShape);
    CHECK(usual->count() == 2 * Usual::kCapacity);
    CHECK(usual->t95_chords().log_mean == Approx(std::log(50.0)).margin(0.03));
}

TEST_CASE("the regain is the weighted mean of what closings showed, and follows a change") {
    auto usual = std::make_unique<Usual>();
    const auto before = usual->regain();
    CHECK(before.ratio == 1.0);
    for (int i = 0; i < 12; ++i) usual->learn_regain(1.12, 0.05);
    CHECK(usual->regain().ratio == Approx(1.12).margin(0.02));
    CHECK(usual->regain().ratio_sd < before.ratio_sd);
    usual->learn_regain(0.5, 5.0);  // says nothing
    CHECK(usual->regain().ratio == Approx(1.12).margin(0.02));
    for (int i = 0; i < 40; ++i) usual->learn_regain(0.95, 0.05);
    CHECK(usual->regain().ratio == Approx(0.95).margin(0.03));
}
