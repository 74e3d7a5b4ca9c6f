#include "sunbudget/tables/class_table.hpp"

#include <algorithm>
#include <array>
#include <cassert>
#include <numeric>
#include <utility>

#include "embedded.hpp"
#include "sunbudget/base/digest.hpp"
#include "sunbudget/base/error.hpp"
#include "sunbudget/base/text.hpp"

namespace sunbudget {

namespace {

using namespace std::string_view_literals;

constexpr std::array kinds{
    std::pair{Kind::none, "none"sv},   std::pair{Kind::roof, "roof"sv},
    std::pair{Kind::paved, "paved"sv}, std::pair{Kind::built, "built"sv},
    std::pair{Kind::bare, "bare"sv},   std::pair{Kind::grass, "grass"sv},
    std::pair{Kind::crop, "crop"sv},   std::pair{Kind::shrub, "shrub"sv},
    std::pair{Kind::tree, "tree"sv},   std::pair{Kind::wetland, "wetland"sv},
    std::pair{Kind::water, "water"sv}, std::pair{Kind::snow, "snow"sv},
    std::pair{Kind::ice, "ice"sv},     std::pair{Kind::other, "other"sv},
};
constexpr std::array scales{std::pair{Scale::facet, "facet"sv}, std::pair{Scale::local, "local"sv}};

template <typename Pairs, typename Value>
std::string_view name_in(const Pairs& pairs, Value value) noexcept {
    for (const auto& [candidate, name] : pairs)
        if (candidate == value) return name;
    return {};
}

template <typename Pairs>
auto value_in(const Pairs& pairs, std::string_view name) noexcept
    -> std::optional<typename Pairs::value_type::first_type> {
    for (const auto& [value, candidate] : pairs)
        if (candidate == name) return value;
    return std::nullopt;
}

template <typename Pairs>
std::vector<std::string> names_in(const Pairs& pairs) {
    std::vector<std::string> names;
    for (const auto& pair : pairs) names.emplace_back(pair.second);
    return names;
}

constexpr auto corine_grid = "corine-grid"sv;

/// The CORINE rasters number the 44 level-3 classes 1 to 44 in the legend's order; 48 is no data.
ClassTable corine_by_grid_code() {
    const auto by_code = shipped_class_table("corine");
    auto rows = by_code.rows();
    int next = 1;
    for (auto& row : rows) row.code = row.is_nodata() ? 48 : next++;
    return {std::string(corine_grid), std::move(rows), by_code.digest()};
}

bool has_all(const ClassTable& table, std::span<const int> codes) {
    return std::all_of(codes.begin(), codes.end(),
                       [&](int code) { return table.find(code) != nullptr; });
}

}  // namespace

std::string_view name_of(Kind kind) noexcept {
    return name_in(kinds, kind);
}
std::string_view name_of(Scale scale) noexcept {
    return name_in(scales, scale);
}
std::optional<Kind> kind_named(std::string_view name) noexcept {
    return value_in(kinds, name);
}
std::optional<Scale> scale_named(std::string_view name) noexcept {
    return value_in(scales, name);
}
std::vector<std::string> kind_names() {
    return names_in(kinds);
}
std::vector<std::string> scale_names() {
    return names_in(scales);
}

ClassTable::ClassTable(std::string name, std::vector<SurfaceClass> rows, std::string digest)
    : name_(std::move(name)),
      rows_(std::move(rows)),
      digest_(std::move(digest)),
      by_code_(rows_.size()) {
    const auto code = [&](std::size_t i) { return rows_[i].code; };
    std::iota(by_code_.begin(), by_code_.end(), std::size_t{0});
    std::sort(by_code_.begin(), by_code_.end(),
              [&](std::size_t a, std::size_t b) { return code(a) < code(b); });
    assert(std::adjacent_find(by_code_.begin(), by_code_.end(), [&](std::size_t a, std::size_t b) {
               return code(a) == code(b);
           }) == by_code_.end());
}

const SurfaceClass* ClassTable::find(int code) const noexcept {
    const auto found =
        std::lower_bound(by_code_.begin(), by_code_.end(), code,
                         [&](std::size_t i, int wanted) { return rows_[i].code < wanted; });
    if (found == by_code_.end() || rows_[*found].code != code) return nullptr;
    return &rows_[*found];
}

std::vector<std::string> shipped_class_table_names() {
    std::vector<std::string> names;
    for (const auto& file : embedded_files()) {
        names.emplace_back(file.name.substr(0, file.name.find('.')));
        if (names.back() == "corine") names.emplace_back(corine_grid);
    }
    return names;
}

ClassTable shipped_class_table(std::string_view name) {
    if (name == corine_grid) return corine_by_grid_code();
    for (const auto& file : embedded_files())
        if (file.name.substr(0, file.name.find('.')) == name)
            return parse_class_table(file.text, std::string(name));
    const auto names = shipped_class_table_names();
    throw Error(Cause::input, "no class table \"" + std::string(name) + "\"", {},
                suggestion(name, names));
}

ClassTable class_table(const std::string& name_or_path) {
    const auto names = shipped_class_table_names();
    if (std::find(names.begin(), names.end(), name_or_path) != names.end())
        return shipped_class_table(name_or_path);
    std::error_code ignored;
    if (std::filesystem::exists(name_or_path, ignored)) return read_class_table(name_or_path);
    throw Error(Cause::input,
                "class table \"" + name_or_path + "\" is neither a shipped table nor a file", {},
                suggestion(name_or_path, names));
}

std::vector<std::string> class_tables_with(std::span<const int> codes) {
    std::vector<std::string> fitting;
    for (const auto& name : shipped_class_table_names())
        if (has_all(shipped_class_table(name), codes)) fitting.push_back(name);
    return fitting;
}

}  // namespace sunbudget
