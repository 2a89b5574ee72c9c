// SPDX-License-Identifier: MIT
#include "estimator/wall/outing_so_far.hpp"

#include <algorithm>
#include <utility>

namespace holdfast::wall {
namespace {

template <class Make>
const Text& made(Text& text, Make make) {
    if (!text) text = std::make_shared<const std::string>(make());
    return text;
}

}  // namespace

void OutingSoFar::take_hello(const std::shared_ptr<const Hello>& hello) {
    std::map<std::uint32_t, RailAlarm> standing = std::move(alarms_);
    std::erase_if(standing, [](const auto& entry) { return !entry.second.standing(); });
    *this = OutingSoFar{};
    hello_ = hello;
    alarms_ = std::move(standing);
}

void OutingSoFar::take(const Item& item) {
    if (const auto* hello = std::get_if<std::shared_ptr<const Hello>>(&item)) {
        take_hello(*hello);
    } else if (const auto* closure = std::get_if<core::Closure>(&item)) {
        closures_.push_back(closure_object(*closure, hello_->flap_chord_m));
        closures_text_.reset();
    } else if (const auto* regrowth = std::get_if<std::shared_ptr<const ZonedRegrowth>>(&item)) {
        if (!(*regrowth)->curve.final) return;
        regrowths_.push_back(regrowth_object(**regrowth));
        if (regrowths_.size() > kRegrowths) regrowths_.pop_front();
        regrowths_text_.reset();
    } else if (const auto* change = std::get_if<AlarmRail::Change>(&item)) {
        alarms_[change->alarm.id] = change->alarm;
        alarms_text_.reset();
    } else if (const auto* health = std::get_if<std::shared_ptr<const Health>>(&item)) {
        health_ = *health;
        health_text_.reset();
    } else if (const auto* end = std::get_if<std::shared_ptr<const End>>(&item)) {
        end_ = *end;
        end_text_.reset();
    }
}

std::string OutingSoFar::alarms_json() const {
    std::vector<std::string> objects;
    for (const auto& [id, alarm] : alarms_) objects.push_back(alarm_object(alarm, hello_->channels));
    return list_message("alarms", objects);
}

std::vector<Text> OutingSoFar::messages(std::span<const Text> history) {
    if (!hello_) return {};
    std::vector<Text> all{made(hello_text_, [&] { return hello_json(*hello_); })};
    all.insert(all.end(), history.begin(), history.end());
    all.push_back(made(closures_text_, [&] { return list_message("closures", closures_); }));
    all.push_back(made(regrowths_text_, [&] {
        const std::vector<std::string> objects(regrowths_.begin(), regrowths_.end());
        return list_message("regrowths", objects);
    }));
    all.push_back(made(alarms_text_, [&] { return alarms_json(); }));
    if (health_) all.push_back(made(health_text_, [&] { return health_json(*health_, hello_->channels); }));
    if (end_) all.push_back(made(end_text_, [&] { return end_json(*end_); }));
    return all;
}

}  // namespace holdfast::wall
