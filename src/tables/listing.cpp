#include "listing.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <filesystem>

#include "materials.hpp"
#include "sunbudget/base/error.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/physics/surface_balance.hpp"
#include "sunbudget/tables/class_table.hpp"
#include "sunbudget/tables/layers.hpp"
#include "sunbudget/tables/methods.hpp"
#include "sunbudget/tables/print.hpp"
#include "sunbudget/tables/quality.hpp"
#include "sunbudget/tables/sensors.hpp"

namespace sunbudget {

namespace {

std::string number(double value) {
    return std::isnan(value) ? std::string{} : shortest(value);
}

Listing class_listing(const ClassTable& table) {
    Listing list{table.name(),
                 "albedo and emissivity by class",
                 table.digest(),
                 {{"code", Cell::number},
                  {"name"},
                  {"kind"},
                  {"scale"},
                  {"albedo", Cell::number},
                  {"albedo_low", Cell::number},
                  {"albedo_high", Cell::number},
                  {"emissivity", Cell::number},
                  {"source", Cell::note}},
                 {}};
    for (const auto& row : table.rows())
        list.rows.push_back({std::to_string(row.code), row.name, std::string(name_of(row.kind)),
                             row.is_nodata() ? "" : std::string(name_of(row.scale)),
                             number(row.albedo), number(row.albedo_low), number(row.albedo_high),
                             number(row.emissivity), row.source});
    return list;
}

Listing method_listing() {
    Listing list{"methods",
                 "how things are computed; the first method of a family is its default",
                 {},
                 {{"family"},
                  {"method"},
                  {"parameter"},
                  {"unit"},
                  {"default", Cell::number},
                  {"usual"},
                  {"allowed"},
                  {"text"},
                  {"source", Cell::note}},
                 {}};
    for (const auto& row : methods()) {
        list.rows.push_back({row.family, row.name, {}, {}, {}, {}, {}, row.text, row.source});
        for (const auto& p : row.parameters)
            list.rows.push_back({row.family,
                                 row.name,
                                 p.name,
                                 p.unit,
                                 p.default_value ? shortest(*p.default_value) : std::string{},
                                 p.usual.text(),
                                 p.allowed.text(),
                                 p.text,
                                 {}});
    }
    return list;
}

std::string quantum_text(const Layer& layer) {
    if (layer.quantity == Quantity::ratio) return "2^-13";
    if (layer.quantity == Quantity::flags) return {};
    if (layer.quantity != Quantity::radiation)
        return shortest(quantum_of(layer, OutputUnit::w_m2, 0));
    return "1/16 W/m2; of sums the largest power of two not above 1/16 W/m2 times the period";
}

Listing layer_listing() {
    Listing list{"layers",
                 "what can be written, one file each",
                 {},
                 {{"layer"},
                  {"unit"},
                  {"sample"},
                  {"rounded_to"},
                  {"standard_name"},
                  {"standard_name_of_sum"},
                  {"text"}},
                 {}};
    for (const auto& row : layers()) {
        const auto unit = row.quantity == Quantity::radiation
                              ? joined(output_unit_names(), " or ")
                              : std::string(unit_of(row, OutputUnit::w_m2));
        list.rows.push_back({row.name, unit, std::string(name_of(row.sample)), quantum_text(row),
                             row.standard_name, row.standard_name_sum, row.text});
    }
    return list;
}

Listing sensor_listing() {
    Listing list{"sensors",
                 "how surface reflectance is stored: reflectance = scale * number + offset",
                 {},
                 {{"sensor"},
                  {"band"},
                  {"product"},
                  {"from_um", Cell::number},
                  {"to_um", Cell::number},
                  {"scale", Cell::number},
                  {"offset", Cell::number},
                  {"fill", Cell::number},
                  {"text", Cell::note},
                  {"source", Cell::note}},
                 {}};
    for (const auto& row : sensors())
        for (const auto& band : row.bands)
            list.rows.push_back(
                {row.name, band.name, band.product, band.to_um > 0 ? shortest(band.from_um) : "",
                 band.to_um > 0 ? shortest(band.to_um) : "", shortest(row.scale),
                 shortest(row.offset), row.fill ? shortest(*row.fill) : "", row.text, row.source});
    return list;
}

Listing test_listing() {
    Listing list{"sensor-quality",
                 "what a product's own quality rasters say, bit by bit",
                 {},
                 {{"sensor"},
                  {"test"},
                  {"raster"},
                  {"band"},
                  {"first_bit", Cell::number},
                  {"bits", Cell::number},
                  {"value", Cell::number},
                  {"flag", Cell::number},
                  {"rejects"},
                  {"source", Cell::note}},
                 {}};
    for (const auto& row : sensors())
        for (const auto& test : row.tests)
            list.rows.push_back({row.name, test.name, test.raster, test.band,
                                 std::to_string(test.first_bit), std::to_string(test.bits),
                                 std::to_string(test.value), std::to_string(test.flag),
                                 test.rejects ? "yes" : "no", test.source});
    return list;
}

Listing weight_listing() {
    Listing list{"weights",
                 "reflectance to albedo: constant + sum of weight * reflectance",
                 {},
                 {{"sensor"},
                  {"set"},
                  {"band"},
                  {"weight", Cell::number},
                  {"fit_error", Cell::number},
                  {"text", Cell::note},
                  {"source", Cell::note}},
                 {}};
    for (const auto& row : weight_sets()) {
        const auto add = [&](const std::string& band, double weight) {
            list.rows.push_back({row.sensor, row.name, band, shortest(weight),
                                 shortest(row.fit_error), row.text, row.source});
        };
        for (const auto& weight : row.weights) add(weight.band, weight.weight);
        add("constant", row.constant);
    }
    return list;
}

Listing quality_listing() {
    Listing list{"quality",
                 "meanings of the layer quality: each holds where (pixel & mask) = value",
                 {},
                 {{"name"}, {"mask", Cell::number}, {"value", Cell::number}, {"text"}},
                 {}};
    for (const auto& row : quality_rows())
        list.rows.push_back(
            {row.name, std::to_string(row.mask), std::to_string(row.value), row.text});
    return list;
}

/// Of materials whose albedo somebody wrote down: a given roof ages and may be another.
Listing sri_listing() {
    Listing list{"sri",
                 "solar reflectance index of common materials after ASTM E1980: 0 the black, 100 "
                 "the white reference, in wind below 2, 2 to 6 "
                 "and 6 to 10 m/s",
                 {},
                 {{"material"},
                  {"albedo", Cell::number},
                  {"emissivity", Cell::number},
                  {"sri_low_wind", Cell::number},
                  {"sri_medium_wind", Cell::number},
                  {"sri_high_wind", Cell::number},
                  {"source", Cell::note}},
                 {}};
    for (const auto& row : materials) {
        std::vector<std::string> cells{row.name, shortest(row.albedo), shortest(row.emissivity)};
        for (const auto wind : {Wind::low, Wind::medium, Wind::high}) {
            const double index = solar_reflectance_index(row.albedo, row.emissivity, wind);
            cells.push_back(shortest(std::round(index * 10) / 10 + 0.0));
        }
        cells.emplace_back(row.source);
        list.rows.push_back(std::move(cells));
    }
    return list;
}

struct Printable {
    const char* name;
    Listing (*make)();
};
constexpr std::array own_tables{
    Printable{"methods", method_listing}, Printable{"layers", layer_listing},
    Printable{"sensors", sensor_listing}, Printable{"sensor-quality", test_listing},
    Printable{"weights", weight_listing}, Printable{"quality", quality_listing},
    Printable{"sri", sri_listing},
};

bool is_shipped(const std::string& name) {
    const auto names = shipped_class_table_names();
    return std::find(names.begin(), names.end(), name) != names.end();
}

}  // namespace

Listing listing(const std::string& name) {
    for (const auto& own : own_tables)
        if (name == own.name) return own.make();
    std::error_code ignored;
    const bool is_path = name.find('/') != std::string::npos;
    if (is_shipped(name) || is_path || std::filesystem::exists(name, ignored))
        return class_listing(class_table(name));
    throw Error(Cause::usage, "no table \"" + name + "\"", {}, suggestion(name, table_names()));
}

std::vector<std::string> table_names() {
    auto names = shipped_class_table_names();
    for (const auto& own : own_tables) names.emplace_back(own.name);
    return names;
}

}  // namespace sunbudget
