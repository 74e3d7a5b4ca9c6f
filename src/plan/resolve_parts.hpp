#pragma once

#include <functional>
#include <map>
#include <string>
#include <utility>
#include <vector>

#include "sunbudget/base/error.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/plan/resolve.hpp"
#include "sunbudget/raster/locator.hpp"

namespace sunbudget {

/// Collects what is wrong with a plan and its inputs, so that all of it can be said at once.
class RunProblems {
  public:
    /// Runs a step; an Error it throws is kept, with the place put in front. False when it threw.
    bool attempt(const Place& place, const std::function<void()>& step);
    void add(Cause cause, const Place& place, std::string what, std::string todo);
    void throw_if_any() const;

  private:
    Cause cause_ = Cause::usage;
    std::vector<Problem> list_;
};

[[nodiscard]] RasterName raster_of(const PlanRaster& raster);
[[nodiscard]] RasterLimits limits_of(const ResolveOptions& options);
/// Every raster the plan names for reading, with the key that names it.
[[nodiscard]] std::vector<std::pair<RasterName, Place>> read_rasters(const Plan& plan);
/// Writes an input down for the metadata, with its warnings.
void add_input(Run& run, const std::string& role, const Source& source);
/// A raster for each of the run's bands: as many files, as many bands of one file, or one for all.
[[nodiscard]] std::vector<Source> band_rasters(const std::vector<PlanRaster>& rasters,
                                               const char* key, const ResolveOptions& options,
                                               Run& run);

/// The middle of the grid, or 0, 0 where its projection has no answer there.
[[nodiscard]] Geodetic middle_of(const Grid& grid);

/// The land cover that is the surface, or that fills what an image does not show; or none.
[[nodiscard]] const CoverSurface* cover_of(const Run& run);

/// What the files of an image's albedo say of it.
[[nodiscard]] std::map<std::string, std::string> reflectance_metadata(
    const ReflectanceSurface& surface);

/// Light under a closed cover in a month, as a share of the clear sky's.
[[nodiscard]] double overcast_in(const Plan& plan, int month);

/// The plan's longwave is net and of whole days.
[[nodiscard]] bool is_daily(const Plan& plan);
/// Such longwave; throws what is wrong with it. The plan has weather, the run its time.
[[nodiscard]] Longwave daily_longwave(const Plan& plan, Run& run);

/// Light is asked for, if only for a balance.
[[nodiscard]] bool needs_light(const Plan& plan);

// The steps of resolve(), in this order; each fills its part of the run.
/// After the cover, which becomes the fill.
void resolve_reflectance(const PlanReflectance& image, const ResolveOptions& options, Run& run,
                         RunProblems& problems);
void resolve_surface(const Plan& plan, const ResolveOptions& options, Run& run,
                     RunProblems& problems);
void resolve_elevation(const Plan& plan, const ResolveOptions& options, Run& run,
                       RunProblems& problems);
void resolve_sky(const Plan& plan, const ResolveOptions& options, Run& run, RunProblems& problems);
void resolve_time(const Plan& plan, Run& run, RunProblems& problems);
/// After the time, which a typical year is laid over.
void resolve_weather(const Plan& plan, const ResolveOptions& options, Run& run,
                     RunProblems& problems);
/// The pressure of the sky, from the plan or the table. After the weather.
void resolve_pressure(const Plan& plan, Run& run, RunProblems& problems);
/// Says which of a table's columns the run is not made from. After all that takes some.
void tell_unused_columns(Run& run);
/// The wind at the ground, and where it is from.
[[nodiscard]] Wind resolved_wind(const Plan& plan, Run& run);
/// Last of the sky: what the table or the plan's clouds make of it.
void resolve_clouds(const Plan& plan, const ResolveOptions& options, Run& run,
                    RunProblems& problems);
/// After surface, sky, time and weather.
void resolve_heat(const Plan& plan, const ResolveOptions& options, Run& run, RunProblems& problems);
/// After both: a sky whose light has its clouds by the pixel has them for its longwave too.
void share_clouds(const Plan& plan, Run& run);
void resolve_layers(const Plan& plan, Run& run, RunProblems& problems);
/// A layer of the run as it is: file, bands, units, metadata.
[[nodiscard]] OutputLayer output_layer(const Layer& layer, const Run& run);
/// After the layers, to which it adds those of the changes.
void resolve_changes(const Plan& plan, const ResolveOptions& options, Run& run,
                     RunProblems& problems);
/// Adds a change, or a case of it, and the layers that show it.
void add_change(Run& run, Change change, const std::string& described);
/// Adds the slope to the layers where zones need it.
void resolve_zones(const Plan& plan, Run& run, RunProblems& problems);

}  // namespace sunbudget
