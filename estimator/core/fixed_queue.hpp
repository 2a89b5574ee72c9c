// SPDX-License-Identifier: MIT
// First in, first out, with its capacity in the type. A full queue refuses the new element and counts it.
#pragma once

#include <array>
#include <cstddef>
#include <cstdint>
#include <optional>

namespace holdfast::core {

template <class T, std::size_t Capacity>
class FixedQueue {
  public:
    void push(const T& element) {
        if (size_ == Capacity) {
            ++overrun_;
            return;
        }
        elements_[(first_ + size_++) % Capacity] = element;
    }
    [[nodiscard]] std::optional<T> pop() {
        if (size_ == 0) return std::nullopt;
        const T element = elements_[first_];
        first_ = (first_ + 1) % Capacity;
        --size_;
        return element;
    }
    [[nodiscard]] std::uint64_t overrun() const { return overrun_; }

  private:
    std::array<T, Capacity> elements_{};
    std::size_t first_ = 0;
    std::size_t size_ = 0;
    std::uint64_t overrun_ = 0;
};

}  // namespace holdfast::core
