// SPDX-License-Identifier: MIT
// The accuracy bench's short form, its figures held by wide bounds: a change that spoils the estimates fails
// here; how good they are is in RESULTS.md.
#include <catch2/catch.hpp>

#include "tests/bench/accuracy/figures.hpp"
#include "tests/bench/accuracy/outing_set.hpp"

TEST_CASE("accuracy, short form, seeds 1 to 3") {
    using namespace holdfast::bench;
    const Figures f = figures_of(run_outings(short_scenarios(), 1, 3));
    INFO(table_head() << "\n" << table_row("all", f));
    REQUIRE(f.closings >= 100U);
    CHECK(f.found == f.closings);
    CHECK(f.invented == 0);
    CHECK(20 * f.judged >= 19 * f.closings);
    CHECK(f.distrusted == 0);
    CHECK(f.t95_inside >= 0.80);
    CHECK(f.others_flagged <= 0.05);
    CHECK(f.verdict_wrong <= 0.10);
    CHECK(f.front_rms <= 0.04);
    CHECK(f.rear_rms <= 0.04);
    CHECK(f.drag_rms <= 0.04);
    // No estimate beats data that all is known of; nor should ours be far from what the straight alone
    // allows.
    CHECK(f.tau_over_second_bound_rms > 0.8);
    CHECK(f.tau_over_brakes_bound_rms < 3.0);
}
