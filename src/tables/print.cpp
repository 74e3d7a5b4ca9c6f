#include "sunbudget/tables/print.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <nlohmann/json.hpp>

#include "csv.hpp"
#include "materials.hpp"
#include "sunbudget/base/error.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/physics/surface_balance.hpp"
#include "sunbudget/tables/class_table.hpp"
#include "sunbudget/tables/layers.hpp"
#include "sunbudget/tables/methods.hpp"
#include "sunbudget/tables/quality.hpp"
#include "sunbudget/tables/sensors.hpp"

namespace sunbudget {

namespace {

enum class Cell { words, number, note };

struct Column {
    std::string name;
    Cell cell = Cell::words;  ///< a note is long and often repeated: in text it stands below
};

/// Any table as cells; an empty cell of a number column means "none".
struct Listing {
    std::string name;
    std::string text;
    std::string digest;  ///< empty but for class tables
    std::vector<Column> columns;
    std::vector<std::vector<std::string>> rows;
};

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

Listing listing(const std::string& name) {
    for (const auto& own : own_tables)
        if (name == own.name) return own.make();
    std::error_code ignored;
    const bool is_path = name.find('/') != std::string::npos;
    if (is_shipped(name) || is_path || std::filesystem::exists(name, ignored))
        return class_listing(class_table(name));
    throw Error(Cause::usage, "no table \"" + name + "\"", {}, suggestion(name, table_names()));
}

std::string as_csv(const Listing& list) {
    std::string text;
    for (const auto& column : list.columns)
        text += (&column == &list.columns.front() ? "" : ",") + column.name;
    for (const auto& row : list.rows) {
        text += '\n';
        for (const auto& cell : row) text += (&cell == &row.front() ? "" : ",") + csv_cell(cell);
    }
    return text + '\n';
}

nlohmann::ordered_json json_of(const Column& column, const std::string& cell) {
    if (column.cell != Cell::number) return cell;
    if (const auto whole = parse_integer(cell)) return *whole;
    if (const auto value = parse_number(cell)) return *value;
    return nullptr;
}

std::string as_json(const Listing& list) {
    nlohmann::ordered_json json{{"table", list.name}, {"text", list.text}};
    if (!list.digest.empty()) json["digest"] = list.digest;
    auto& rows = json["rows"] = nlohmann::ordered_json::array();
    for (const auto& row : list.rows) {
        nlohmann::ordered_json object;
        for (std::size_t i = 0; i < row.size(); ++i)
            object[list.columns[i].name] = json_of(list.columns[i], row[i]);
        rows.push_back(std::move(object));
    }
    return json.dump(2) + '\n';
}

/// Characters of a UTF-8 text, so that columns line up.
std::size_t length(const std::string& text) {
    return static_cast<std::size_t>(
        std::count_if(text.begin(), text.end(), [](char c) { return (c & 0xc0) != 0x80; }));
}

std::vector<std::size_t> widths(const Listing& list) {
    std::vector<std::size_t> most;
    for (std::size_t i = 0; i < list.columns.size(); ++i) {
        most.push_back(length(list.columns[i].name));
        for (const auto& row : list.rows) most[i] = std::max(most[i], length(row[i]));
    }
    return most;
}

std::string aligned(const std::vector<std::string>& cells, const Listing& list,
                    const std::vector<std::size_t>& most) {
    std::string line;
    for (std::size_t i = 0; i < cells.size(); ++i) {
        const std::string gap(most[i] - length(cells[i]), ' ');
        line += (i > 0 ? "  " : "") +
                (list.columns[i].cell == Cell::number ? gap + cells[i] : cells[i] + gap);
    }
    line.erase(line.find_last_not_of(' ') + 1);
    return printable(line) + '\n';
}

/// The listing with each note replaced by its number, and the notes in that order.
std::vector<std::string> take_notes(Listing& list) {
    std::vector<std::string> notes;
    for (auto& row : list.rows) {
        for (std::size_t i = 0; i < row.size(); ++i) {
            if (list.columns[i].cell != Cell::note || row[i].empty()) continue;
            const auto found = std::find(notes.begin(), notes.end(), row[i]);
            const auto index = found - notes.begin();
            if (found == notes.end()) notes.push_back(row[i]);
            row[i] = '[' + std::to_string(index + 1) + ']';
        }
    }
    return notes;
}

std::string as_text(Listing list) {
    std::string text = list.name + ": " + list.text + '\n';
    if (!list.digest.empty()) text += list.digest + '\n';
    const auto notes = take_notes(list);
    std::vector<std::string> header;
    for (const auto& column : list.columns) header.push_back(column.name);
    const auto most = widths(list);
    text += '\n' + aligned(header, list, most);
    for (const auto& row : list.rows) text += aligned(row, list, most);
    if (!notes.empty()) text += '\n';
    for (std::size_t i = 0; i < notes.size(); ++i)
        text += '[' + std::to_string(i + 1) + "] " + printable(notes[i]) + '\n';
    return text;
}

}  // namespace

std::vector<std::string> table_names() {
    auto names = shipped_class_table_names();
    for (const auto& own : own_tables) names.emplace_back(own.name);
    return names;
}

std::string table_text(std::string_view name) {
    const auto names = table_names();
    if (std::find(names.begin(), names.end(), name) == names.end()) return {};
    return listing(std::string(name)).text;
}

std::string printed_table(const std::string& name, TableFormat format) {
    const auto list = listing(name);
    if (format == TableFormat::csv) return as_csv(list);
    return format == TableFormat::json ? as_json(list) : as_text(list);
}

}  // namespace sunbudget
