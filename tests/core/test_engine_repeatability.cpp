// SPDX-License-Identifier: MIT
// The engine as an object: no heap in a step, the same frames give the same bits, frames that come twice or
// late change nothing but their counts.
#include <catch2/catch.hpp>
#include <cstdlib>
#include <cstring>
#include <new>

#include "tests/core/scenario.hpp"

namespace {

// Allocations of this program while `counting` is set.
bool counting = false;
std::size_t allocations = 0;

void* allocate_or_null(std::size_t size) noexcept {
    if (counting) ++allocations;
    return std::malloc(size == 0 ? 1 : size);
}
void* allocate(std::size_t size) {
    void* memory = allocate_or_null(size);
    if (memory == nullptr) throw std::bad_alloc();
    return memory;
}
void* allocate_aligned(std::size_t size, std::align_val_t alignment) {
    if (counting) ++allocations;
    const auto step = static_cast<std::size_t>(alignment);
    void* memory = std::aligned_alloc(step, (size + step - 1) / step * step);
    if (memory == nullptr) throw std::bad_alloc();
    return memory;
}

}  // namespace

void* operator new(std::size_t size) {
    return allocate(size);
}
void* operator new[](std::size_t size) {
    return allocate(size);
}
void* operator new(std::size_t size, std::align_val_t alignment) {
    return allocate_aligned(size, alignment);
}
void* operator new[](std::size_t size, std::align_val_t alignment) {
    return allocate_aligned(size, alignment);
}
void* operator new(std::size_t size, const std::nothrow_t&) noexcept {
    return allocate_or_null(size);
}
void* operator new[](std::size_t size, const std::nothrow_t&) noexcept {
    return allocate_or_null(size);
}
void operator delete(void* memory) noexcept {
    std::free(memory);
}
void operator delete[](void* memory) noexcept {
    std::free(memory);
}
void operator delete(void* memory, std::size_t) noexcept {
    std::free(memory);
}
void operator delete[](void* memory, std::size_t) noexcept {
    std::free(memory);
}
void operator delete(void* memory, std::align_val_t) noexcept {
    std::free(memory);
}
void operator delete[](void* memory, std::align_val_t) noexcept {
    std::free(memory);
}
void operator delete(void* memory, std::size_t, std::align_val_t) noexcept {
    std::free(memory);
}
void operator delete[](void* memory, std::size_t, std::align_val_t) noexcept {
    std::free(memory);
}

namespace {

using namespace holdfast;
using namespace holdfast::testing;

constexpr const char* kCar = "open_wheel-full";
constexpr std::uint64_t kSeed = 7;
constexpr double kPart_s = 100.0;  // with four closings in it

// Bits of what the engine says.
struct Said {
    std::vector<core::Estimate> estimates;
    std::vector<core::Closure> closings;
    std::vector<core::Alarm> alarms;
};

template <class T>
bool same_bits(const T& a, const T& b) {
    return std::memcmp(&a, &b, sizeof(T)) == 0;
}
bool same_bits(const core::Quantity& a, const core::Quantity& b) {
    return same_bits(a.value, b.value) && same_bits(a.sd, b.sd);
}

void check_same(const Said& a, const Said& b) {
    REQUIRE(a.estimates.size() == b.estimates.size());
    std::size_t different = 0;
    for (std::size_t i = 0; i < a.estimates.size(); ++i) {
        const core::Estimate &x = a.estimates[i], &y = b.estimates[i];
        different += x.time_ns == y.time_ns && x.flags == y.flags && same_bits(x.speed_mps, y.speed_mps) &&
                             same_bits(x.cla_front_m2, y.cla_front_m2) &&
                             same_bits(x.cla_rear_m2, y.cla_rear_m2) && same_bits(x.cda_m2, y.cda_m2) &&
                             same_bits(x.attached, y.attached)
                         ? 0U
                         : 1U;
    }
    CHECK(different == 0);
    REQUIRE(a.closings.size() == b.closings.size());
    for (std::size_t i = 0; i < a.closings.size(); ++i) {
        const core::Closure &x = a.closings[i], &y = b.closings[i];
        CHECK((x.number == y.number && same_bits(x.tau_s, y.tau_s) && same_bits(x.t95_s, y.t95_s) &&
               same_bits(x.shortfall_n, y.shortfall_n) &&
               same_bits(x.probability_short, y.probability_short) && x.verdict == y.verdict));
    }
    CHECK(a.alarms.size() == b.alarms.size());
}

// Feeds the frames; `disturb` may feed more between them.
template <class Disturb>
Said follow(core::Engine& engine, const Drive& drive, Disturb&& disturb) {
    Said said;
    std::size_t not_done = 0;
    for (std::size_t i = 0; i < drive.frames().size() && drive.frames()[i].time_s() < kPart_s; ++i) {
        not_done += engine.step(drive.frames()[i]) == core::StepResult::done ? 0U : 1U;
        if (i % 8 == 0) said.estimates.push_back(engine.estimate());
        while (const auto c = engine.take_closure()) said.closings.push_back(*c);
        while (const auto a = engine.take_alarm()) said.alarms.push_back(*a);
        disturb(i);
    }
    CHECK(not_done == 0);
    return said;
}

std::unique_ptr<core::Engine> engine_of(const Drive& drive) {
    return std::make_unique<core::Engine>(drive.car(), core::Settings{});
}

}  // namespace

TEST_CASE("no step of a whole outing allocates, nor does what is read from it, seed 7") {
    const Drive& drive = Drive::of(kCar, kSeed);
    const auto engine = engine_of(drive);
    std::size_t closings = 0, done = 0;
    double sum = 0.0;
    allocations = 0;
    counting = true;
    for (const Frame& frame : drive.frames()) {
        done += engine->step(frame) == core::StepResult::done ? 1U : 0U;
        sum += engine->estimate().cla_rear_m2.value;
        while (engine->take_closure()) ++closings;
        while (engine->take_alarm()) sum += 1.0;
    }
    engine->finish();
    counting = false;
    CHECK(allocations == 0);
    CHECK(done == drive.frames().size());
    CHECK(closings == drive.closings().size());
    CHECK(std::isfinite(sum));
}

TEST_CASE("the counter of allocations counts") {
    allocations = 0;
    counting = true;
    auto memory = std::make_unique<std::array<double, 64>>();
    counting = false;
    CHECK(allocations == 1);
    CHECK(memory);
}

TEST_CASE("the same frames give the same bits, in a second engine and in a copy made on the way, seed 7") {
    const Drive& drive = Drive::of(kCar, kSeed);
    const auto nothing = [](std::size_t) {};
    const auto first = engine_of(drive), second = engine_of(drive);
    const Said said = follow(*first, drive, nothing);
    CHECK(said.closings.size() >= 3);
    check_same(said, follow(*second, drive, nothing));
    Follow whole(drive), half(drive);
    whole.until(kPart_s);
    half.until(0.6 * kPart_s);
    Follow copy = half;
    copy.until(kPart_s);
    check_same({whole.estimates(), whole.closings(), whole.alarms()},
               {copy.estimates(), copy.closings(), copy.alarms()});
}

TEST_CASE("repeated and late frames are counted, say so, and change no bit, seed 7") {
    const Drive& drive = Drive::of(kCar, kSeed);
    const auto clean = engine_of(drive), disturbed = engine_of(drive);
    const Said said = follow(*clean, drive, [](std::size_t) {});
    std::size_t extra = 0, wrong = 0;
    const Said again = follow(*disturbed, drive, [&](std::size_t i) {
        if (i % 13 == 5) {
            wrong += disturbed->step(drive.frames()[i]) == core::StepResult::repeated ? 0U : 1U;
            ++extra;
        }
        if (i % 97 == 50) {
            wrong += disturbed->step(drive.frames()[i - 20]) == core::StepResult::out_of_order ? 0U : 1U;
            ++extra;
        }
    });
    CHECK(wrong == 0);
    check_same(said, again);
    const std::size_t load = index(Channel::load_fl);
    CHECK(disturbed->health()[load].samples == clean->health()[load].samples);
    CHECK(disturbed->health()[load].repeats == extra);  // the loads come with every frame
    CHECK(clean->health()[load].repeats == 0);
}
