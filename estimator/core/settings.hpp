// SPDX-License-Identifier: MIT
// Limits that the user may move. Defaults live here and nowhere else.
#pragma once

namespace holdfast::core {

struct Settings {
    double short_share_limit = 0.03;    // shortfall over rear downforce that counts as short
    double alarm_probability = 0.90;    // probability_short at brake onset that raises the alarm
    double verdict_probability = 0.80;  // probability that a verdict full or short needs; else unclear
    double slow_factor = 1.6;           // in chords, against the car's usual
    double slow_probability = 0.65;     // probability_slow that flags a closing
    double stale_s = 0.25;              // a needed channel silent for longer is stale (source time)
};

}  // namespace holdfast::core
