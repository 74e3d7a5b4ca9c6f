#include "sunbudget/raster/source.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "overlay.hpp"
#include "pixel_map.hpp"
#include "sunbudget/base/error.hpp"
#include "sunbudget/base/simd.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/raster/grid_build.hpp"

namespace sunbudget {
namespace {

/// Below this many source pixels a side the averaging box is called bilinear in texts: it reaches
/// hardly beyond the four neighbours.
constexpr double bilinear_up_to = 1.05;

/// Classes' values are averaged beyond this many source pixels a side. Nearer to 1 each target pixel
/// keeps one class, so that values agree with the class (its kind) found at the same place.
constexpr double one_class_up_to = 1.5;

std::string_view text_of(Origin origin) {
    switch (origin) {
        case Origin::user:
            return "given";
        case Origin::file:
            return "from the file";
        case Origin::profile:
            return "from the profile";
        case Origin::none:
            break;
    }
    return "none";
}

std::string text_of(const Scaling& scaling) {
    return "scale " + shortest(scaling.scale) + ", offset " + shortest(scaling.offset);
}

struct ChosenScaling {
    Scaling scaling;
    Origin origin = Origin::none;
};
ChosenScaling choose_scaling(const SourceSpec& spec, const RasterInfo& info,
                             std::vector<std::string>& warnings) {
    if (spec.kind == DataKind::code) {
        if (info.scale)
            warnings.emplace_back("scale and offset in the file are not applied to codes");
        return {};
    }
    const auto file =
        info.scale ? std::optional(Scaling{*info.scale, info.offset.value_or(0)}) : std::nullopt;
    if (spec.scaling) {
        if (file && *file != *spec.scaling)
            warnings.push_back("the file says " + text_of(*file) + "; the given " +
                               text_of(*spec.scaling) + " is used instead");
        return {*spec.scaling, Origin::user};
    }
    if (file) {
        const auto& profile = spec.profile_scaling;
        if (profile && *file != *profile) {
            const bool turned = std::abs(file->scale * profile->scale - 1) < 1e-9;
            warnings.push_back("the file says " + text_of(*file) + " where its product has " +
                               text_of(*profile) + "; the file's is used" +
                               (turned ? ". It looks upside down: give scale: " +
                                             shortest(profile->scale) + " to overrule it"
                                       : ""));
        }
        return {*file, Origin::file};
    }
    if (spec.profile_scaling) return {*spec.profile_scaling, Origin::profile};
    return {};
}

struct ChosenNodata {
    std::optional<double> value;
    Origin origin = Origin::none;
};
ChosenNodata choose_nodata(const SourceSpec& spec, const RasterInfo& info) {
    if (spec.nodata) {
        const auto possible = possible_nodata(info.type, *spec.nodata);
        if (!possible)
            throw Error(Cause::usage,
                        "nodata " + shortest(*spec.nodata) + " cannot occur in a band of " +
                            std::string(sunbudget::text_of(info.type)),
                        sunbudget::text_of(info.name), "leave nodata out or correct it");
        return {possible, Origin::user};
    }
    if (info.nodata) return {info.nodata, Origin::file};
    if (spec.profile_nodata)
        if (const auto possible = possible_nodata(info.type, *spec.profile_nodata))
            return {possible, Origin::profile};
    return {};
}

/// Codes beyond the table, negative ones among them, get its last value.
SUNBUDGET_CLONES void look_up(const std::int32_t* codes, std::size_t count, const float* table,
                              std::uint32_t last, float* values) noexcept {
    for (std::size_t i = 0; i < count; ++i)
        values[i] = table[std::min(static_cast<std::uint32_t>(codes[i]), last)];
}

}  // namespace

CodeValues::CodeValues(std::span<const std::pair<std::int32_t, float>> values) {
    constexpr std::int32_t most_dense = 65535;
    std::int32_t highest = -1;
    for (const auto& [code, value] : values)
        if (code <= most_dense) highest = std::max(highest, code);
    dense_.assign(static_cast<std::size_t>(highest + 2), std::numeric_limits<float>::quiet_NaN());
    for (const auto& [code, value] : values) {
        if (code >= 0 && code <= most_dense)
            dense_[static_cast<std::size_t>(code)] = value;
        else
            others_[code] = value;
    }
}

void CodeValues::of_row(std::span<const std::int32_t> codes,
                        std::span<float> values) const noexcept {
    look_up(codes.data(), codes.size(), dense_.data(),
            static_cast<std::uint32_t>(dense_.size() - 1), values.data());
    if (others_.empty()) return;
    for (std::size_t i = 0; i < codes.size(); ++i)
        if (codes[i] < 0 || static_cast<std::size_t>(codes[i]) + 1 >= dense_.size())
            values[i] = of(codes[i]);
}

Source Source::open(const SourceSpec& spec, const Grid& target) {
    Source source;
    source.spec_ = spec;
    source.target_ = target;
    source.info_ = inspect(spec.name, spec.limits);
    source.warnings_ = source.info_.warnings;
    const auto scaling = choose_scaling(spec, source.info_, source.warnings_);
    source.scaling_ = scaling.scaling;
    source.scaling_origin_ = scaling.origin;
    const auto nodata = choose_nodata(spec, source.info_);
    source.nodata_ = nodata.value;
    source.nodata_origin_ = nodata.origin;

    const auto overlay = overlay_of(PixelMap(target, source.info_.grid));
    if (overlay.coverage <= 0)
        throw Error(Cause::input, "the raster lies nowhere on the run's grid",
                    text_of(source.info_.name),
                    "it has " + describe(source.info_.grid) + "; the run has " + describe(target));
    source.coverage_ = overlay.coverage;
    source.columns_per_pixel_ = overlay.columns_per_pixel;
    source.rows_per_pixel_ = overlay.rows_per_pixel;
    if (overlay.copied) {
        source.column_shift_ = overlay.column_shift;
        source.row_shift_ = overlay.row_shift;
        source.alignment_ =
            same_grid(source.info_.grid, target) ? Alignment::same : Alignment::shifted;
    } else if (spec.kind == DataKind::code) {
        source.alignment_ = Alignment::nearest;
    } else {
        const double most = std::max(overlay.columns_per_pixel, overlay.rows_per_pixel);
        source.alignment_ = most > bilinear_up_to ? Alignment::averaged : Alignment::bilinear;
    }
    return source;
}

Alignment Source::values_alignment() const noexcept {
    if (alignment_ == Alignment::same || alignment_ == Alignment::shifted) return alignment_;
    return std::sqrt(columns_per_pixel_ * rows_per_pixel_) > one_class_up_to ? Alignment::averaged
                                                                             : Alignment::nearest;
}

std::string Source::alignment_text() const {
    const auto averaged = fmt::format("averaged over {:.2f} x {:.2f} source pixels",
                                      columns_per_pixel_, rows_per_pixel_);
    std::string text;
    switch (alignment_) {
        case Alignment::same:
            text = "same grid";
            break;
        case Alignment::shifted:
            text =
                fmt::format("same cells, from column {} and row {} on", column_shift_, row_shift_);
            break;
        case Alignment::nearest:
            text = "nearest pixel";
            break;
        case Alignment::bilinear:
            text = "bilinear";
            break;
        case Alignment::averaged:
            text = averaged;
            break;
    }
    if (alignment_ == Alignment::nearest && values_alignment() == Alignment::averaged)
        text += ", values of classes " + averaged;
    if (info_.storage != Storage::north_up)
        text += fmt::format(", stored {}", sunbudget::text_of(info_.storage));
    if (!same_crs(info_.grid.crs_wkt, target_.crs_wkt))
        text += ", reprojected from " + crs_name(info_.grid.crs_wkt);
    return text;
}

std::vector<std::string> Source::description() const {
    std::vector<std::string> lines{
        fmt::format("{}, {}, {}", describe(info_.grid), sunbudget::text_of(info_.type),
                    info_.driver),
        fmt::format("{}; covers {:.1f} % of the grid", alignment_text(), 100 * coverage_)};
    if (spec_.kind == DataKind::continuous)
        lines.push_back(fmt::format("{} ({})", text_of(scaling_), text_of(scaling_origin_)));
    std::string nodata =
        nodata_ ? fmt::format("nodata {} ({})", shortest(*nodata_), text_of(nodata_origin_))
                : "no nodata value";
    if (info_.mask == MaskKind::mask_band) nodata += ", mask band";
    if (info_.mask == MaskKind::alpha) nodata += ", alpha band as mask";
    lines.push_back(nodata);
    for (const auto& warning : warnings_) lines.push_back("warning: " + warning);
    return lines;
}

}  // namespace sunbudget
