// SPDX-License-Identifier: MIT
// Other values into a car file's own text: every line that is not changed stays as it is, comments too, and a
// changed line says in a comment what stood there before.
#pragma once

#include <string>
#include <vector>

#include "estimator/core/car.hpp"
#include "estimator/session/error.hpp"

namespace holdfast::session {

struct CarFileChange {
    std::string table;  // "rear"
    std::string key;    // "wheel_rate"
    core::Quantity value;
};

// The text of the car file at `path` with these values and, beside each, its <key>_sd, which is added where
// the file has none. Errors: the file cannot be read or is not TOML; a key is not in it, or is written in a
// way that cannot be changed in place. Whoever writes the text somewhere reads it back.
[[nodiscard]] Result<std::string> changed_car_file(const std::string& path,
                                                   const std::vector<CarFileChange>& changes);

}  // namespace holdfast::session
