// SPDX-License-Identifier: MIT
// What outlives the streams of one run of the program: the alarms that nobody has acknowledged, and the page.
#pragma once

#include <memory>

#include "estimator/wall/alarm_rail.hpp"
#include "estimator/wall/server.hpp"

namespace holdfast::wall {

struct Wall {
    AlarmRail rail;
    std::unique_ptr<Server> server;  // null: no page was asked for
};

}  // namespace holdfast::wall
