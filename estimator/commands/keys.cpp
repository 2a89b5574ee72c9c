// SPDX-License-Identifier: MIT
#include <iostream>

#include "estimator/commands/commands.hpp"
#include "estimator/commands/exit_status.hpp"
#include "estimator/session/car_keys.hpp"

namespace holdfast::commands {

int keys() {
    session::print_key_reference(std::cout);
    return kDone;
}

}  // namespace holdfast::commands
