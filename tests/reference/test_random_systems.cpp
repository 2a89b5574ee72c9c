// SPDX-License-Identifier: MIT
// The filter and the smoother that the engine and a replay use, on random linear systems that an independent
// library solved: statsmodels/random_systems.py and what it printed, statsmodels 0.13.5, seed 20240.
#include <algorithm>
#include <array>
#include <catch2/catch.hpp>
#include <cmath>
#include <fstream>
#include <map>
#include <sstream>
#include <stdexcept>
#include <string>
#include <vector>

#include "estimator/outputs/smoothing.hpp"
#include "tests/reference/moving_system.hpp"

namespace {

using namespace holdfast;
using namespace holdfast::testing;

using Numbers = std::vector<double>;

// A line is a name, then its numbers.
class Solved {
  public:
    Solved() {
        const std::string path = HOLDFAST_SOURCE_DIR "/tests/reference/statsmodels/random_systems.txt";
        std::ifstream file(path);
        if (!file) throw std::runtime_error(path + ": cannot be read");
        for (std::string line; std::getline(file, line);) {
            std::istringstream words(line);
            std::string name;
            words >> name;
            Numbers& numbers = lines_[name];
            for (double v = 0.0; words >> v;) numbers.push_back(v);
        }
    }
    [[nodiscard]] const Numbers& at(const std::string& name) const { return lines_.at(name); }
    [[nodiscard]] const Numbers& at(const std::string& name, std::size_t time) const {
        return at(name + "." + std::to_string(time));
    }
    [[nodiscard]] std::size_t size(const std::string& name, std::size_t i) const {
        return static_cast<std::size_t>(at(name).at(i));
    }

  private:
    std::map<std::string, Numbers> lines_;
};

template <std::size_t N>
std::array<double, N> vector_of(const Numbers& numbers, std::size_t from = 0) {
    std::array<double, N> v{};
    for (std::size_t i = 0; i < N; ++i) v[i] = numbers.at(from + i);
    return v;
}

// From its lower triangle, row by row.
template <std::size_t N>
Matrix<N> symmetric(const Numbers& triangle) {
    Matrix<N> m{};
    std::size_t k = 0;
    for (std::size_t i = 0; i < N; ++i)
        for (std::size_t j = 0; j <= i; ++j) m[i][j] = m[j][i] = triangle.at(k++);
    return m;
}

// P = U D U^T, column by column from the last (Bierman 1977, ch. III).
template <std::size_t N>
core::UdFilter<double, N> filter_of(const Numbers& mean, const Numbers& covariance_triangle) {
    Matrix<N> p = symmetric<N>(covariance_triangle);
    core::UdFilter<double, N> filter;
    filter.set_diagonal({});
    filter.x = vector_of<N>(mean);
    for (std::size_t j = N; j-- > 0;) {
        filter.diagonal(j) = static_cast<double>(p[j][j]);
        for (std::size_t i = 0; i < j; ++i) filter.column(j)[i] = static_cast<double>(p[i][j] / p[j][j]);
        for (std::size_t i = 0; i < j; ++i)
            for (std::size_t k = 0; k < j; ++k) p[i][k] -= p[i][j] * p[k][j] / p[j][j];
    }
    return filter;
}

// The measurements of one time, one after the other; their log-likelihood.
template <std::size_t N>
double update(core::UdFilter<double, N>& filter, const Numbers& design, const Numbers& measured,
              double noise) {
    double log_likelihood = 0.0;
    for (std::size_t m = 0; m < measured.size(); ++m) {
        const auto h = vector_of<N>(design, m * N);
        double innovation = measured[m];
        for (std::size_t i = 0; i < N; ++i) innovation -= h[i] * filter.x[i];
        const double variance = filter.expect(h, noise);
        filter.apply(innovation);
        log_likelihood -= 0.5 * (std::log(2.0 * M_PI * variance) + innovation * innovation / variance);
    }
    return log_likelihood;
}

template <std::size_t N>
double worst_mean(const std::array<double, N>& found, const Numbers& expected, const Matrix<N>& covariance) {
    double worst = 0.0;
    for (std::size_t i = 0; i < N; ++i) {
        const auto sd = std::sqrt(static_cast<double>(covariance[i][i]));
        worst = std::max(worst, std::abs(found[i] - expected.at(i)) / sd);
    }
    return worst;
}

// In standard deviations; the file has thirteen digits, and the smoother lets a trace of 1e-12 in.
constexpr double kRounding = 1e-9, kTrace = 1e-7;

}  // namespace

TEST_CASE("filter of moving and resting states: as statsmodels has it, log-likelihood included, seed 20240") {
    constexpr std::size_t kStates = 8, kMoved = 3, kInputs = 2;
    const Solved solved;
    REQUIRE(solved.at("moving.size") == Numbers{kStates, kMoved, kInputs, 40, 2});
    MovingSystem<kStates, kMoved, kInputs> system;
    for (std::size_t i = 0; i < kMoved; ++i) {
        for (std::size_t j = 0; j < kStates; ++j)
            system.f[i][j] = solved.at("moving.transition").at(i * kStates + j);
        for (std::size_t k = 0; k < kInputs; ++k)
            system.input[i][k] = solved.at("moving.entry").at(i * kInputs + k);
    }
    system.q = vector_of<kInputs>(solved.at("moving.q"));
    auto filter = filter_of<kStates>(solved.at("moving.mean"), solved.at("moving.covariance"));
    double log_likelihood = 0.0;
    for (std::size_t k = 0; k < solved.size("moving.size", 3); ++k) {
        if (k > 0) predict(filter, system);
        log_likelihood += update(filter, solved.at("moving.design", k), solved.at("moving.measured", k),
                                 solved.at("moving.noise").at(0));
    }
    const auto covariance = symmetric<kStates>(solved.at("moving.filtered_covariance"));
    CHECK(worst_mean(filter.x, solved.at("moving.filtered_mean"), covariance) < kRounding);
    CHECK(worst_difference(covariance_of(filter), covariance) < kRounding);
    CHECK(log_likelihood == Approx(solved.at("moving.log_likelihood").at(0)).epsilon(1e-10));
}

TEST_CASE("slow states filtered, kept as snapshots and smoothed: as statsmodels has it, seed 20240") {
    constexpr std::size_t kStates = 14,
                          kSlow = core::kSlowCount;  // solved, and of the program: those beyond rest
    static_assert(kStates <= kSlow);
    const Solved solved;
    REQUIRE(solved.at("slow.size") == Numbers{kStates, 6, 2});
    const std::size_t times = solved.size("slow.size", 1);
    auto filter = filter_of<kStates>(solved.at("slow.mean"), solved.at("slow.covariance"));
    outputs::Smoother smoother;
    for (std::size_t k = 0; k < times; ++k) {
        INFO("time " << k);
        for (std::size_t i = 0; i < kStates && k > 0; ++i) {
            const double kept = solved.at("slow.kept", k).at(i);
            filter.x[i] *= kept;
            filter.scale_state(i, kept);
            filter.add_noise(i, solved.at("slow.added", k).at(i));
        }
        (void)update(filter, solved.at("slow.design", k), solved.at("slow.measured", k),
                     solved.at("slow.noise").at(0));
        const auto expected = symmetric<kStates>(solved.at("slow.filtered_covariance", k));
        const auto covariance = covariance_of(filter);
        CHECK(worst_mean(filter.x, solved.at("slow.filtered_mean", k), expected) < kRounding);
        CHECK(worst_difference(covariance, expected) < kRounding);
        core::SlowSnapshot snapshot;
        snapshot.time_s = static_cast<double>(k);
        std::copy(filter.x.begin(), filter.x.end(), snapshot.mean.begin());
        for (std::size_t i = kStates; i < kSlow; ++i)
            snapshot.kept[i] = snapshot.covariance[i * kSlow + i] = 1.0;
        for (std::size_t i = 0; i < kStates; ++i) {
            snapshot.kept[i] = filter.kept(i);
            snapshot.added[i] = filter.added(i);
            for (std::size_t j = 0; j < kStates; ++j)
                snapshot.covariance[i * kSlow + j] = static_cast<double>(covariance[i][j]);
        }
        filter.forget_changes();
        smoother.add(snapshot);
    }
    smoother.solve();
    REQUIRE(smoother.states().size() == times);
    for (std::size_t k = 0; k < times; ++k) {
        INFO("time " << k);
        const auto& state = smoother.states()[k];
        const auto expected = symmetric<kStates>(solved.at("slow.smoothed_covariance", k));
        Matrix<kStates> covariance{};
        for (std::size_t i = 0; i < kStates; ++i)
            for (std::size_t j = 0; j < kStates; ++j) covariance[i][j] = state.covariance[i * kSlow + j];
        std::array<double, kStates> mean{};
        std::copy_n(state.mean.begin(), kStates, mean.begin());
        CHECK(worst_mean(mean, solved.at("slow.smoothed_mean", k), expected) < kTrace);
        CHECK(worst_difference(covariance, expected) < kTrace);
    }
    // The smoother has moved something.
    CHECK(std::abs(smoother.states()[0].change[0]) > 1e-3);
}
