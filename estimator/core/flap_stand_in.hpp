// SPDX-License-Identifier: MIT
// Where the flap should be by its command, while its position is not to be had: on its way for as long as it
// usually is. Good enough for the areas; how the flow comes back after a closing cannot be judged by it,
// since one closing takes longer than another.
#pragma once

#include <algorithm>

namespace holdfast::core {

class FlapStandIn {
  public:
    void command(double time_s, bool open) {
        if (open == open_ && asked_) return;
        asked_ = true;
        open_ = open;
        asked_s_ = time_s;
        arrived_ = false;
    }
    // A sound sample of the position.
    void learn(double time_s, double position) {
        if (!asked_ || arrived_ || (open_ ? position < kThere : position > 1.0 - kThere)) return;
        arrived_ = true;
        double& takes_s = open_ ? opening_s_ : closing_s_;
        const double took_s = time_s - asked_s_;
        if (took_s > kMost_s) return;
        takes_s = takes_s > 0.0 ? takes_s + kNewest * (took_s - takes_s) : took_s;
    }
    [[nodiscard]] bool known() const { return opening_s_ > 0.0 && closing_s_ > 0.0; }
    [[nodiscard]] double position(double time_s) const {
        const double way = std::clamp((time_s - asked_s_) / (open_ ? opening_s_ : closing_s_), 0.0, 1.0);
        return open_ ? way : 1.0 - way;
    }

  private:
    static constexpr double kThere = 0.95;
    static constexpr double kNewest = 0.3;  // weight of the newest movement
    static constexpr double kMost_s = 1.0;

    bool asked_ = false, open_ = false, arrived_ = true;
    double asked_s_ = 0.0;
    double opening_s_ = 0.0, closing_s_ = 0.0;  // from the command to being there; 0: not seen yet
};

}  // namespace holdfast::core
