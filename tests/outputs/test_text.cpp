// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>
#include <cmath>
#include <limits>
#include <random>

#include "estimator/outputs/text.hpp"

using namespace holdfast::outputs;

TEST_CASE("numbers are written short, and keep nine digits") {
    CHECK(number(0.0) == "0");
    CHECK(number(-0.0) == "0");
    CHECK(number(117.633) == "117.633");
    CHECK(number(-2.5) == "-2.5");
    CHECK(number(1.0 / 3.0) == "0.333333333");
    CHECK(number(123456.789) == "123456.789");
    CHECK(number(std::numeric_limits<double>::quiet_NaN()).empty());
    CHECK(number(std::numeric_limits<double>::infinity()).empty());

    constexpr unsigned kSeed = 20;
    INFO("seed " << kSeed);
    std::mt19937_64 random(kSeed);
    std::uniform_real_distribution<double> exponent(-12.0, 12.0);
    for (int i = 0; i < 1000; ++i) {
        const double value = std::pow(10.0, exponent(random));
        CHECK(std::stod(number(value)) == Approx(value).epsilon(5.1e-9));
    }
}

TEST_CASE("numbers for people have their decimals, and unknown is a word") {
    CHECK(fixed(3.14159, 2) == "3.14");
    CHECK(fixed(-0.12, 3) == "-0.120");
    CHECK(fixed(std::nan(""), 1) == "unknown");
    CHECK(fixed(1e300, 0).size() == 301);
}

TEST_CASE("a row keeps its empty cells") {
    Row row;
    row.empty().add(1.5).add_if(false, 7.0).add(3).add("short").empty();
    CHECK(row.line() == ",1.5,,3,short,\n");
}
