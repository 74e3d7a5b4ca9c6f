#pragma once

#include <cstddef>
#include <filesystem>
#include <limits>
#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <utility>
#include <vector>

namespace sunbudget {

/// What a surface is made of, in few words: decides which pixels are ranked as heat-absorbing
/// (roof, paved, built, bare) and how albedo follows the sun's height.
enum class Kind {
    none,     ///< no surface at all: the class's code means "no data"
    roof,     ///< roofs
    paved,    ///< roads, squares, parking, rail
    built,    ///< a mixture of roofs, walls, paving and what stands between
    bare,     ///< soil, sand, rock
    grass,    ///< grass and other low plants, moss and lichen
    crop,     ///< fields, vineyards, orchards in mixture with fields
    shrub,    ///< woody plants below tree height
    tree,     ///< forest, single trees
    wetland,  ///< plants and soil in shallow water
    water,    ///< open water
    snow,     ///< snow, perennial snow and ice
    ice,      ///< bare ice
    other,    ///< unknown: albedo stays as given whatever the sun's height
};

/// What a class's albedo belongs to: one surface (facet), or a whole neighbourhood with the light
/// caught between its buildings already counted (local).
enum class Scale { facet, local };

[[nodiscard]] std::string_view name_of(Kind kind) noexcept;
/// Roofs, paving and other works of builders.
[[nodiscard]] constexpr bool is_built(Kind kind) noexcept {
    return kind == Kind::roof || kind == Kind::paved || kind == Kind::built;
}
/// Ground that no plant or water cools: what a dry surface's balance holds for.
[[nodiscard]] constexpr bool is_dry(Kind kind) noexcept {
    return is_built(kind) || kind == Kind::bare;
}
[[nodiscard]] std::string_view name_of(Scale scale) noexcept;
[[nodiscard]] std::optional<Kind> kind_named(std::string_view name) noexcept;
[[nodiscard]] std::optional<Scale> scale_named(std::string_view name) noexcept;
[[nodiscard]] std::vector<std::string> kind_names();
[[nodiscard]] std::vector<std::string> scale_names();

inline constexpr double not_known = std::numeric_limits<double>::quiet_NaN();

/// One row of a class table. Of kind `none` all numbers are NaN: its pixels are nodata, which is
/// not the same as a code the table does not have.
struct SurfaceClass {
    int code = 0;
    std::string name{};
    Kind kind = Kind::other;
    Scale scale = Scale::facet;
    double albedo = not_known;      ///< typical, broadband shortwave, 0..1
    double albedo_low = not_known;  ///< low <= typical <= high
    double albedo_high = not_known;
    double emissivity = not_known;  ///< broadband longwave, 0..1; NaN where nobody said
    std::string source{};           ///< where the figures come from, or how they were chosen

    [[nodiscard]] bool is_nodata() const noexcept { return kind == Kind::none; }
};

/// The classes of one land-cover legend.
class ClassTable {
  public:
    /// Codes are unique (asserted).
    ClassTable(std::string name, std::vector<SurfaceClass> rows, std::string digest);

    /// "worldcover", or the path it was read from.
    [[nodiscard]] const std::string& name() const noexcept { return name_; }
    /// In the file's order.
    [[nodiscard]] const std::vector<SurfaceClass>& rows() const& noexcept { return rows_; }
    [[nodiscard]] std::vector<SurfaceClass> rows() && noexcept { return std::move(rows_); }
    /// "sha256:..." of the file's bytes, shipped or the user's.
    [[nodiscard]] const std::string& digest() const noexcept { return digest_; }
    /// nullptr for a code the table does not have.
    [[nodiscard]] const SurfaceClass* find(int code) const noexcept;

  private:
    std::string name_;
    std::vector<SurfaceClass> rows_;
    std::string digest_;
    std::vector<std::size_t> by_code_;
};

/// worldcover, nlcd, corine (three-digit codes), corine-grid (the same classes as 1 to 44, which is
/// what the published rasters hold), lcz.
[[nodiscard]] std::vector<std::string> shipped_class_table_names();
/// Throws Error(input) with a suggestion for a name that is not shipped.
[[nodiscard]] ClassTable shipped_class_table(std::string_view name);

/// A user's table: CSV in UTF-8, a header, columns by name in any order and case. Required: code,
/// name, albedo. Optional: kind (other), scale (facet), albedo_low, albedo_high (albedo),
/// emissivity (not known), source (""); an empty cell means the default in parentheses. Lines that
/// start with # and empty lines are skipped; cells may be quoted. A row of kind `none` declares a
/// code without data and leaves albedo empty.
///
/// errors  Error(input) with every problem and its line
[[nodiscard]] ClassTable read_class_table(const std::filesystem::path& file);
/// The same from text in memory; `name` stands for the file in the table and in the problems.
[[nodiscard]] ClassTable parse_class_table(std::string_view text, const std::string& name);

/// A shipped table by name, else the file of that path. Throws Error(input) for neither.
[[nodiscard]] ClassTable class_table(const std::string& name_or_path);

/// Shipped tables that have every one of the codes: what to suggest when a raster does not fit.
[[nodiscard]] std::vector<std::string> class_tables_with(std::span<const int> codes);

}  // namespace sunbudget
