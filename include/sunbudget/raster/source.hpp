#pragma once

#include <cstdint>
#include <limits>
#include <map>
#include <memory>
#include <optional>
#include <span>
#include <string>
#include <unordered_map>
#include <utility>
#include <vector>

#include "sunbudget/base/plane.hpp"
#include "sunbudget/raster/grid.hpp"
#include "sunbudget/raster/raster_file.hpp"

namespace sunbudget {

/// Codes are never mixed; continuous values may be.
enum class DataKind { code, continuous };

/// value = number in the file * scale + offset.
struct Scaling {
    double scale = 1;
    double offset = 0;

    friend bool operator==(const Scaling&, const Scaling&) = default;
};

/// What to read and how. Of scaling and nodata exactly one is used, never two: the user's own, else
/// the file's, else the profile's (a sensor's), else none.
struct SourceSpec {
    RasterName name;
    DataKind kind = DataKind::continuous;
    std::optional<Scaling> scaling;
    std::optional<Scaling> profile_scaling;
    std::optional<double> nodata;
    std::optional<double> profile_nodata;
    RasterLimits limits;
};

/// Who a number came from.
enum class Origin { none, user, file, profile };

/// How the target's pixels get their values.
enum class Alignment {
    same,      ///< the very same grid
    shifted,   ///< same cells, a whole number of pixels away: copied
    nearest,   ///< the source pixel under the middle of the target pixel
    bilinear,  ///< between the four source pixels around it
    averaged,  ///< over the target pixel's footprint, which is larger than a source pixel
};

/// A code that stands for nodata and for pixels outside the raster.
inline constexpr std::int32_t no_code = std::numeric_limits<std::int32_t>::min();

/// A value for each class code, NaN for every other code.
class CodeValues {
  public:
    CodeValues() = default;
    explicit CodeValues(std::span<const std::pair<std::int32_t, float>> values);
    [[nodiscard]] float of(std::int32_t code) const noexcept {
        if (code >= 0 && static_cast<std::size_t>(code) + 1 < dense_.size())
            return dense_[static_cast<std::size_t>(code)];
        if (others_.empty()) return std::numeric_limits<float>::quiet_NaN();
        const auto found = others_.find(code);
        return found == others_.end() ? std::numeric_limits<float>::quiet_NaN() : found->second;
    }

    /// The same for a row.
    void of_row(std::span<const std::int32_t> codes, std::span<float> values) const noexcept;

  private:
    std::vector<float> dense_{
        std::numeric_limits<float>::quiet_NaN()};  ///< its last stands for all beyond
    std::unordered_map<std::int32_t, float> others_;
};

/// One raster as the run sees it: opened, checked and laid over the target grid. Never changes, and
/// may be shared between threads.
class Source {
  public:
    /// Throws Error(input) when the raster cannot be used, or lies nowhere on the target grid.
    [[nodiscard]] static Source open(const SourceSpec& spec, const Grid& target);

    [[nodiscard]] const SourceSpec& spec() const noexcept { return spec_; }
    [[nodiscard]] const RasterInfo& info() const noexcept { return info_; }
    [[nodiscard]] const Grid& target() const noexcept { return target_; }

    [[nodiscard]] Scaling scaling() const noexcept { return scaling_; }
    [[nodiscard]] Origin scaling_origin() const noexcept { return scaling_origin_; }
    [[nodiscard]] std::optional<double> nodata() const noexcept { return nodata_; }
    [[nodiscard]] Origin nodata_origin() const noexcept { return nodata_origin_; }

    /// How `read` (continuous) or `read_codes` (codes) fills the target.
    [[nodiscard]] Alignment alignment() const noexcept { return alignment_; }
    /// How `read_values` fills it: averaged where a target pixel holds more than 1.5 source pixels a
    /// side, else as `read_codes` does.
    [[nodiscard]] Alignment values_alignment() const noexcept;
    /// Source pixels along a target pixel's two sides, at the middle of the overlap.
    [[nodiscard]] double columns_per_pixel() const noexcept { return columns_per_pixel_; }
    [[nodiscard]] double rows_per_pixel() const noexcept { return rows_per_pixel_; }
    /// Share of the target's pixels that lie on the raster, nodata or not, [0, 1]; from a sample of
    /// 64 x 64 places.
    [[nodiscard]] double coverage() const noexcept { return coverage_; }
    /// "same grid", "whole pixels away (12 columns, -3 rows)", "nearest, reprojected from ...".
    [[nodiscard]] std::string alignment_text() const;
    /// One line each for people: grid and type, alignment, scaling, nodata, warnings.
    [[nodiscard]] std::vector<std::string> description() const;
    [[nodiscard]] const std::vector<std::string>& warnings() const noexcept { return warnings_; }

  private:
    friend class Reader;
    Source() = default;
    SourceSpec spec_;
    RasterInfo info_;
    Grid target_;
    Scaling scaling_;
    Origin scaling_origin_ = Origin::none;
    std::optional<double> nodata_;
    Origin nodata_origin_ = Origin::none;
    Alignment alignment_ = Alignment::same;
    long column_shift_ = 0;  ///< source column of target column 0, where copied
    long row_shift_ = 0;
    double columns_per_pixel_ = 1;
    double rows_per_pixel_ = 1;
    double coverage_ = 1;
    std::vector<std::string> warnings_;
};

/// Reads a source in pixels of the target grid. One object per thread; it refers to its source.
///
/// Windows may reach beyond the target grid: its lattice goes on, and so does the raster. The bits
/// of a pixel do not depend on the window it was asked for with.
/// Nodata, masked pixels, NaN, infinities and everything outside the raster have no value.
/// Resampled pixels have one when their middle lies on the raster and at least half of the weight
/// that lies on it has a value.
class Reader {
  public:
    explicit Reader(const Source& source);
    ~Reader();
    Reader(Reader&&) noexcept;
    Reader& operator=(Reader&&) noexcept;

    /// Physical values: scaled once in double, then rounded to float; NaN where there is none.
    ///
    /// shape   `out` becomes window.width x window.height
    /// errors  Error(input) on a read error, naming file and place
    void read(const Window& window, Plane<float>& out);
    /// Class codes, never mixed; `no_code` where there is none. Throws Error(input) also for numbers
    /// that are no codes (fractions, beyond 32 bits).
    void read_codes(const Window& window, Plane<std::int32_t>& out);
    /// The values of the classes, averaged over larger target pixels (albedo mixes linearly); NaN
    /// for codes without a value. A share of classes without value counts as nodata.
    void read_values(const Window& window, const CodeValues& values, Plane<float>& out);

    /// Infinite numbers met in the source so far; pixels read twice count twice.
    [[nodiscard]] std::uint64_t infinities() const noexcept;

  private:
    struct State;
    std::unique_ptr<State> state_;
};

/// How often each class occurs.
struct CodeCounts {
    std::map<std::int32_t, std::uint64_t> counts;
    std::uint64_t without_code = 0;

    [[nodiscard]] std::uint64_t total() const noexcept;
};

/// Counts the source's own pixels inside the rectangle of rows and columns that the target grid
/// covers. Decodes every block once, in parallel.
[[nodiscard]] CodeCounts count_codes(const Source& source, int threads);
/// The same from at most `blocks` stored blocks spread evenly; counts are of the sample.
[[nodiscard]] CodeCounts sample_codes(const Source& source, int threads, int blocks);

}  // namespace sunbudget
