// SPDX-License-Identifier: MIT
// report.html: one file that draws the outing with the page's own modules and needs nothing beside it. The
// template page/report.html is a page as it stands; its style sheets, its module and its data are put inside.
#pragma once

#include <span>
#include <string>

#include "estimator/wall/messages.hpp"
#include "estimator/wall/page_file.hpp"

namespace holdfast::wall {

// Throws std::runtime_error where the template lacks a place that has to be filled.
[[nodiscard]] std::string report_html(std::span<const Text> messages,
                                      std::span<const PageFile> files = page_files());

}  // namespace holdfast::wall
