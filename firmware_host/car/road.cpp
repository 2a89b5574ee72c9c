// SPDX-License-Identifier: MIT
#include "firmware_host/car/road.hpp"

#include <bit>
#include <cmath>
#include <numbers>

namespace holdfast::sim {

Road::Road(const RoadParameters& road, const std::vector<Kerb>& kerbs, double lap_m, double behind_m,
           double ahead_m, std::uint64_t seed)
    : road_(road), ahead_m_(ahead_m), fresh_(seed, Stream::road_fresh) {
    // ISO 8608: Gd(n) = Gd(n0) (n0/n)^2, one-sided. The slope is white with (2 pi n0)^2 Gd(n0) one-sided,
    // half of it two-sided, so a step over one cell has that times the cell as its variance.
    constexpr double kReference = 0.1;  // n0, cycles/m
    const double slope_psd = std::pow(2.0 * std::numbers::pi * kReference, 2) * road.roughness_m3;
    step_sd_m_ = std::sqrt(0.5 * slope_psd * kCellM);

    const auto cells = static_cast<std::size_t>(std::ceil(lap_m / kCellM));
    Random repeated(seed, Stream::road_lap);
    lap_steps_.resize(cells);
    for (auto& step : lap_steps_) {
        const Sides drawn = draw(repeated);
        step = {static_cast<float>(drawn[0]), static_cast<float>(drawn[1])};
    }
    kerbs_.resize(cells);
    for (const Kerb& kerb : kerbs) {
        const auto begin = static_cast<std::size_t>(kerb.distance_m / kCellM);
        const auto length = static_cast<std::size_t>(kerb.length_m / kCellM);
        for (std::size_t i = 0; i < length; ++i) {
            const double phase =
                2.0 * std::numbers::pi * static_cast<double>(i) / static_cast<double>(length);
            const double rise = 0.5 * kerb.height_m * (1.0 - std::cos(phase));
            kerbs_[(begin + i) % cells][kerb.left ? 0 : 1] += static_cast<float>(rise);
        }
    }
    const auto needed = static_cast<std::size_t>((behind_m + ahead_m) / kCellM) + 4;
    ring_.resize(std::bit_ceil(needed));
    // Begin some wave lengths before the start, so that the profile is as rough there as later.
    newest_cell_ = -static_cast<std::int64_t>(behind_m / kCellM + 3.0 * road.longest_wave_m / kCellM);
    advance_to(0.0);
}

Road::Sides Road::draw(Random& random) const {
    const double common = random.normal() * std::sqrt(road_.left_right_correlation);
    const double own = std::sqrt(1.0 - road_.left_right_correlation);
    const double left = common + own * random.normal();
    const double right = common + own * random.normal();
    return {left, right};
}

void Road::add_cell() {
    ++newest_cell_;
    const auto lap_cells = static_cast<std::int64_t>(lap_steps_.size());
    const auto lap_cell = static_cast<std::size_t>(((newest_cell_ % lap_cells) + lap_cells) % lap_cells);
    const Sides fresh = draw(fresh_);
    const double keep = std::exp(-2.0 * std::numbers::pi * kCellM / road_.longest_wave_m);
    const double follow = 1.0 - std::exp(-kCellM / road_.patch_m);
    Sides cell;
    for (std::size_t side = 0; side < 2; ++side) {
        const double step = std::sqrt(road_.repeat_share) * static_cast<double>(lap_steps_[lap_cell][side]) +
                            std::sqrt(1.0 - road_.repeat_share) * fresh[side];
        rough_[side] = keep * rough_[side] + step_sd_m_ * step;
        smoothed_[side] += follow * (rough_[side] - smoothed_[side]);
        cell[side] = smoothed_[side] + static_cast<double>(kerbs_[lap_cell][side]);
    }
    ring_[static_cast<std::size_t>(newest_cell_) & (ring_.size() - 1)] = cell;
}

void Road::advance_to(double distance_m) {
    const auto needed = static_cast<std::int64_t>(std::floor((distance_m + ahead_m_) / kCellM)) + 1;
    while (newest_cell_ < needed) add_cell();
}

double Road::height(double distance_m, std::size_t side) const {
    const double cells = distance_m / kCellM;
    const double whole = std::floor(cells);
    const double share = cells - whole;
    const auto cell = static_cast<std::size_t>(static_cast<std::int64_t>(whole));
    const std::size_t mask = ring_.size() - 1;
    return (1.0 - share) * ring_[cell & mask][side] + share * ring_[(cell + 1) & mask][side];
}

}  // namespace holdfast::sim
