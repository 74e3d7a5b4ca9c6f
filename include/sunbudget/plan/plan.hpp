#pragma once

#include <array>
#include <filesystem>
#include <optional>
#include <string>
#include <variant>
#include <vector>

#include "sunbudget/model/time_plan.hpp"
#include "sunbudget/plan/plan_outputs.hpp"
#include "sunbudget/plan/plan_surface.hpp"
#include "sunbudget/plan/plan_weather.hpp"

namespace sunbudget {

enum class LikeInput { surface, elevation };

struct PlanGrid {
    Maybe<std::variant<LikeInput, PlanPath>> like;
    Maybe<std::string> crs;
    Maybe<std::array<double, 4>> bounds;  ///< west, south, east, north in the CRS's unit
    Maybe<double> cell;                   ///< in the CRS's unit
    friend bool operator==(const PlanGrid&, const PlanGrid&) = default;
};

/// Hours of the day in the plan's zone, 0 <= begin < end <= 24.
struct HourWindow {
    double begin_h = 0;
    double end_h = 24;
    friend bool operator==(const HourWindow&, const HourWindow&) = default;
};

/// Both days inclusive.
struct NamedPeriod {
    Given<std::string> name;
    Given<CivilDate> from;
    Given<CivilDate> to;
    friend bool operator==(const NamedPeriod&, const NamedPeriod&) = default;
};

enum class DayChoice { all, mid_month };

/// Has an offset of its own, or the plan has a zone: never both, never neither.
struct PlanInstant {
    WrittenInstant written;
    friend bool operator==(const PlanInstant& a, const PlanInstant& b) {
        return a.written.local.date == b.written.local.date &&
               a.written.local.seconds_of_day == b.written.local.seconds_of_day &&
               a.written.offset_s == b.written.offset_s;
    }
};

/// Nothing, or `at`, or `from` and `to` (inclusive) with what belongs to a period.
struct PlanTime {
    Maybe<PlanInstant> at;
    Maybe<CivilDate> from;
    Maybe<CivilDate> to;
    Maybe<int> step_s;
    Maybe<HourWindow> hours;
    Maybe<PlanZone> zone;
    Maybe<std::variant<Totals, std::vector<NamedPeriod>>> totals;
    Maybe<DayChoice> days;
    friend bool operator==(const PlanTime&, const PlanTime&) = default;
};

/// A plan as written: a key that is absent is absent here. `with_defaults` fills in the defaults.
struct Plan {
    std::string file;  ///< as named by the user; empty for a plan made from flags
    Maybe<std::string> title;
    PlanGrid grid;
    PlanSurface surface;
    PlanTerrain terrain;
    PlanSky sky;
    std::optional<PlanWeather> weather;
    PlanLongwave longwave;
    Maybe<PlanSurfaceTemperature> surface_temperature;
    PlanTime time;
    PlanOutputs outputs;
    std::optional<PlanZones> zones;
    std::vector<PlanChange> changes;
    PlanReport report;
    PlanEngine engine;

    /// Same values; where they stand does not matter.
    friend bool operator==(const Plan& a, const Plan& b) {
        return a.title == b.title && a.grid == b.grid && a.surface == b.surface &&
               a.terrain == b.terrain && a.sky == b.sky && a.weather == b.weather &&
               a.longwave == b.longwave && a.surface_temperature == b.surface_temperature &&
               a.time == b.time && a.outputs == b.outputs && a.zones == b.zones &&
               a.changes == b.changes && a.report == b.report && a.engine == b.engine;
    }
};

/// `key.path=value` as given to --set: lists and quoted texts in YAML's flow style, anything else
/// taken as it stands.
using Override = std::string;

struct PlanText {
    std::string file;  ///< the name in messages; its folder is what relative paths start from
    std::string text;
    std::vector<Override> overrides;
};

/// Reads and checks a plan, every problem at once.
///
/// errors  Error(usage) with one problem per mistake, sorted by line, `where` = "FILE:LINE:
/// key.path"
[[nodiscard]] Plan parse_plan(const PlanText& plan);
/// The same from a file. Throws Error(input) when it cannot be read.
[[nodiscard]] Plan read_plan(const std::filesystem::path& file,
                             const std::vector<Override>& overrides = {});

/// The plan with every default filled in that applies to it; such values say `place.is_default`.
/// Left empty: what follows from the inputs (grid, scale and offset of a raster).
[[nodiscard]] Plan with_defaults(Plan plan);

/// The plan as YAML, keys in the order of the manual, without defaults that nobody wrote. Relative
/// paths stay as given, which is right in the plan's own folder; with a `folder` they are written
/// from there. Reads back as an equal plan.
[[nodiscard]] std::string plan_text(const Plan& plan, const std::filesystem::path& folder = {});

/// SHA-256 of everything that shapes the rasters' content and metadata, defaults included; so not
/// of the output directory, the report, comments, the order of keys or the way numbers are written. Files count
/// by the name the plan gives them: their content has digests of its own.
[[nodiscard]] std::string plan_digest(const Plan& plan);

/// JSON Schema (draft 2020-12) of the plan file.
[[nodiscard]] std::string plan_schema_json();

/// Every key with meaning, unit, choices and default, as a commented plan.
[[nodiscard]] std::string plan_help();

}  // namespace sunbudget
