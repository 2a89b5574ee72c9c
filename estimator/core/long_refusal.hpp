// SPDX-License-Identifier: MIT
// A channel that its filter refuses for long has something wrong with it; one that is accepted again for long
// has not.
#pragma once

namespace holdfast::core {

class LongRefusal {
  public:
    LongRefusal(double wrong_after_s, double right_after_s)
        : wrong_after_s_(wrong_after_s), right_after_s_(right_after_s) {}

    void add(bool refused, double interval_s) {
        refused_s_ = refused ? refused_s_ + interval_s : 0.0;
        accepted_s_ = refused ? 0.0 : accepted_s_ + interval_s;
    }
    [[nodiscard]] bool begins() const { return refused_s_ > 0.0 && refused_s_ <= 0.02; }
    [[nodiscard]] bool wrong() const { return refused_s_ > wrong_after_s_; }
    [[nodiscard]] bool right() const { return accepted_s_ > right_after_s_; }
    [[nodiscard]] double refused_s() const { return refused_s_; }
    void clear() { refused_s_ = accepted_s_ = 0.0; }

  private:
    double wrong_after_s_, right_after_s_;
    double refused_s_ = 0.0, accepted_s_ = 0.0;
};

}  // namespace holdfast::core
