// SPDX-License-Identifier: MIT
#include "estimator/session/car_file.hpp"

#include <algorithm>
#include <map>
#include <optional>
#include <set>
#include <utility>

#include "estimator/session/car_keys.hpp"
#include "estimator/session/toml_file.hpp"

namespace holdfast::session {
namespace {

constexpr std::string_view kSdSuffix = "_sd";
constexpr std::string_view kRideHeightTable = "ride_height";

class CarReader {
  public:
    CarReader(const std::string& path, const std::vector<TomlEntry>& entries) {
        result_.file = path;
        for (const TomlEntry& entry : entries) {
            entries_.emplace(entry.key(), &entry);
            unread_.insert(entry.key());
        }
    }

    Result<CarFile> read() {
        find_sensors();
        read_name();
        for (const CarKey& key : car_keys()) {
            if (key.table != kSensorTable) {
                read_key(key, std::string(key.table), 0);
                continue;
            }
            for (std::size_t i = 0; i < result_.car.ride_height_count; ++i) {
                read_key(key, std::string(kRideHeightTable) + "." + result_.ride_height_names[i], i);
            }
        }
        complain_of_unknown();
        check_flap_angles();
        if (errors_.empty()) check_masses();
        if (errors_.empty()) return std::move(result_);
        std::stable_sort(errors_.begin(), errors_.end(),
                         [](const Error& a, const Error& b) { return a.line < b.line; });
        return std::move(errors_);
    }

  private:
    void complain(const std::string& key, std::uint64_t line, std::string message) {
        errors_.push_back({result_.file, line, 0, key, std::move(message)});
    }

    const TomlEntry* take(const std::string& key) {
        return unread_.erase(key) > 0 ? entries_.at(key) : nullptr;
    }

    void find_sensors() {
        std::vector<const TomlEntry*> sensors;
        for (const auto& [key, entry] : entries_) {
            const bool is_table_within =
                entry->is_table() && entry->path.size() == 2 && entry->path[0] == kRideHeightTable;
            if (is_table_within && entry->path[1] != "tyre_growth") sensors.push_back(entry);
        }
        std::sort(sensors.begin(), sensors.end(),
                  [](const TomlEntry* a, const TomlEntry* b) { return a->line < b->line; });
        for (const TomlEntry* sensor : sensors) {
            if (result_.car.ride_height_count == kMaxRideHeights) {
                complain(sensor->key(), sensor->line,
                         "one sensor too many; expected " + std::to_string(kMaxRideHeights) + " at most");
                continue;
            }
            result_.ride_height_names.push_back(sensor->path[1]);
            ++result_.car.ride_height_count;
        }
        if (sensors.empty()) {
            complain(
                std::string(kRideHeightTable), line_of(std::string(kRideHeightTable)),
                "no sensor; expected NAME = { static = ..., x = ..., y = ... } for one sensor at each axle");
        }
    }

    void read_name() {
        result_.name = "unnamed car";
        const TomlEntry* entry = take("car.name");
        if (entry == nullptr) return;
        if (entry->text() == nullptr) {
            return complain("car.name", entry->line, "found " + describe(*entry) + "; expected a text");
        }
        result_.name = *entry->text();
    }

    void read_key(const CarKey& key, const std::string& table, std::size_t sensor) {
        const std::string path = table + "." + std::string(key.key);
        const TomlEntry* value = take(path);
        const TomlEntry* sd = take(path + std::string(kSdSuffix));
        core::Quantity quantity{key.fallback, 0.0};
        if (value != nullptr) {
            const std::optional<double> number = number_in(*value, key.least, key.most, key.unit);
            if (!number) return;
            quantity.value = *number;
        } else if (key.need == CarKey::Need::needed) {
            return complain(path, line_of(table),
                            "missing; expected " + expectation(key.least, key.most, key.unit));
        } else if (key.need == CarKey::Need::optional) {
            if (sd != nullptr)
                complain(sd->key(), sd->line, "no " + std::string(key.key) + " beside it; expected both");
            return;
        }
        quantity.sd = key.sd.of(quantity.value);
        if (sd != nullptr) {
            const std::optional<double> number = number_in(*sd, 0.0, key.most - key.least, key.unit);
            if (!number) return;
            quantity.sd = *number;
        }
        key.set(result_.car, sensor, quantity);
    }

    std::optional<double> number_in(const TomlEntry& entry, double least, double most,
                                    std::string_view unit) {
        const double* number = entry.number();
        if (number != nullptr && *number >= least && *number <= most) return *number;
        complain(entry.key(), entry.line,
                 "found " + describe(entry) + "; expected " + expectation(least, most, unit));
        return std::nullopt;
    }

    static std::string expectation(double least, double most, std::string_view unit) {
        return "a number from " + number_text(least) + " to " + number_text(most) +
               (unit == "-" ? "" : " " + std::string(unit));
    }

    // What has not been taken is a table, or not known.
    void complain_of_unknown() {
        for (const std::string& key : unread_) {
            const TomlEntry* entry = entries_.at(key);
            const std::string table = table_of(*entry);
            const std::vector<std::string> known = keys_of(table);
            if (entry->is_table() && !keys_of(own_table(*entry)).empty()) continue;
            const bool in_no_sensor = table == kSensorTable && !is_sensor(entry->path[1]);
            if (entry->path.size() > 1 && (known.empty() || in_no_sensor))
                continue;  // its table was complained of
            if (entry->path.size() == 1) {
                complain(key, entry->line,
                         "not known; expected a table: [car], [front], [rear], [flap], [ride_height]");
            } else {
                const bool may_be_sensor = table == kRideHeightTable;
                complain(key, entry->line,
                         "not known; expected one of " + joined(known) +
                             (may_be_sensor ? " or NAME = { static, x, y }" : "") +
                             ", or one of these with _sd");
            }
        }
    }

    bool is_sensor(const std::string& name) const {
        const std::vector<std::string>& names = result_.ride_height_names;
        return std::find(names.begin(), names.end(), name) != names.end();
    }

    // Name, in the key records, of the table that an entry is in, and of the table that it is.
    static std::string record_table(const std::vector<std::string>& path, std::size_t depth) {
        if (depth == 1) return path[0];
        return depth == 2 && path[0] == kRideHeightTable ? std::string(kSensorTable) : "";
    }
    static std::string table_of(const TomlEntry& entry) {
        return record_table(entry.path, entry.path.size() - 1);
    }
    static std::string own_table(const TomlEntry& entry) {
        return record_table(entry.path, entry.path.size());
    }

    static std::vector<std::string> keys_of(const std::string& table) {
        std::vector<std::string> keys;
        if (table == "car") keys.emplace_back("name");
        for (const CarKey& key : car_keys()) {
            if (key.table == table) keys.emplace_back(key.key);
        }
        return keys;
    }

    // 0 where the file has no such key or table.
    std::uint64_t line_of(const std::string& key) const {
        const auto found = entries_.find(key);
        return found == entries_.end() ? 0 : found->second->line;
    }

    void check_flap_angles() {
        const std::uint64_t closed = line_of("flap.closed_angle");
        const std::uint64_t open = line_of("flap.open_angle");
        core::Car& car = result_.car;
        car.flap_angles_known = closed > 0 && open > 0;
        if (!car.flap_angles_known && (closed > 0 || open > 0)) {
            complain(closed > 0 ? "flap.open_angle" : "flap.closed_angle", std::max(closed, open),
                     "missing; expected both ends of the flap's travel, or neither");
        }
        if (car.flap_angles_known && car.flap_open_angle_rad.value == car.flap_closed_angle_rad.value) {
            complain("flap.open_angle", open, "the same as flap.closed_angle; expected two ends of travel");
        }
    }

    void check_masses() {
        const core::Car& car = result_.car;
        const double unsprung = 2.0 * (car.front.unsprung_mass_kg.value + car.rear.unsprung_mass_kg.value);
        if (unsprung < car.mass_kg.value) return;
        complain("car.mass", line_of("car.mass"),
                 "found " + number_text(car.mass_kg.value) + " kg; expected more than the " +
                     number_text(unsprung) + " kg of the four unsprung masses");
    }

    CarFile result_;
    std::map<std::string, const TomlEntry*> entries_;  // by key
    std::set<std::string> unread_;
    Errors errors_;
};

}  // namespace

Result<CarFile> read_car_file(const std::string& path) {
    const Result<std::vector<TomlEntry>> entries = read_toml_file(path);
    if (!entries) return entries.errors();
    return CarReader(path, *entries).read();
}

}  // namespace holdfast::session
