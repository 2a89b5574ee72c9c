// SPDX-License-Identifier: MIT
#include <iostream>

#include "estimator/commands/commands.hpp"
#include "estimator/session/car_keys.hpp"
#include "proto/vocabulary/exit_status.hpp"

namespace holdfast::commands {

int keys() {
    session::print_key_reference(std::cout);
    return kDone;
}

}  // namespace holdfast::commands
