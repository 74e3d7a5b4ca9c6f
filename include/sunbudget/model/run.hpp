#pragma once

#include <array>
#include <cstdint>
#include <map>
#include <memory>
#include <optional>
#include <string>
#include <utility>
#include <variant>
#include <vector>

#include "sunbudget/model/change.hpp"
#include "sunbudget/model/heat.hpp"
#include "sunbudget/model/light.hpp"
#include "sunbudget/model/measured_sky.hpp"
#include "sunbudget/model/quality_raster.hpp"
#include "sunbudget/model/terrain.hpp"
#include "sunbudget/model/time_plan.hpp"
#include "sunbudget/model/weather_record.hpp"
#include "sunbudget/physics/quality_bits.hpp"
#include "sunbudget/raster/layer_file.hpp"
#include "sunbudget/raster/polygons.hpp"
#include "sunbudget/raster/source.hpp"
#include "sunbudget/tables/class_table.hpp"
#include "sunbudget/tables/layers.hpp"
#include "sunbudget/tables/methods.hpp"
#include "sunbudget/tables/sensors.hpp"

namespace sunbudget {

/// Albedo from a land-cover raster and a class table.
struct CoverSurface {
    Source codes;
    CodeValues albedo;  ///< of every code of the table, and of the default class's codes
    CodeValues albedo_uncertainty;  ///< of those whose range the table has
    CodeValues quality;             ///< the `quality` layer's source number for each code
    CodeValues emissivity;
    CodeValues built_emissivity;  ///< of built kinds alone
    CodeValues dry;               ///< 1 for dry built and bare kinds, 0 for others
    bool averaged = false;        ///< the grid is coarser: class albedos are averaged
};

/// Albedo as given: a raster, or one number for all.
struct GivenSurface {
    std::variant<double, Source> albedo;
    std::optional<double> uncertainty;  ///< standard; nothing: nobody said
};

/// One band of an image and its weight.
struct ReflectanceBand {
    std::string name;
    double weight = 0;
    Source reflectance;
};

/// What is known of an image besides its pixels.
struct ImageFacts {
    std::string sensor;
    std::string scene;  ///< the product's id; empty where unknown
    std::optional<UtcSeconds> acquired_utc;
    std::optional<CivilDate> date;            ///< where the time is not known
    std::optional<double> sun_elevation_deg;  ///< in the middle of the scene
    std::optional<double> sun_azimuth_deg;
    std::vector<std::string> rejected;  ///< names of the quality tests
};

/// Albedo from an image: weighted reflectance where the image can be used, else the fill's.
struct ReflectanceSurface {
    std::vector<ReflectanceBand> bands;
    WeightSet weights;
    std::vector<QualityRaster> quality;
    std::optional<CoverSurface> fill;
    std::uint16_t rejecting = 0;  ///< flags that make a pixel lose the image's albedo
    ImageFacts facts;
};

/// What a layer of a change shows.
struct ChangedLayer {
    std::size_t change = 0;  ///< counts the run's changes
    bool saved = false;      ///< before less after; otherwise after
    std::size_t base = 0;    ///< the run's layer that shows the same before
};

/// One file that came out of a run's grid and methods.
struct OutputLayer {
    const Layer* layer = nullptr;
    LayerFile file;
    std::vector<double> factors;            ///< from W m-2 to the stored unit, one a band
    std::optional<ChangedLayer> changed{};  ///< nothing: of the run as it is
};

/// A file the run reads, as its metadata name it.
struct InputFile {
    std::string role;  ///< the plan's key: "surface.cover.raster"
    std::string name;  ///< without folders
    std::string digest;
    std::vector<std::string> notes;          ///< grid, alignment, scale, nodata: one line each
    double coverage = 1;                     ///< share of the grid's pixels it covers
    std::shared_ptr<const Source> source{};  ///< nothing for what is no raster
};

/// A class of the cover raster that the run uses.
struct ClassUse {
    int code = 0;
    std::string name;
    std::uint64_t pixels = 0;  ///< of the raster, as counted or sampled
    std::optional<double> albedo;
    std::optional<double> albedo_low, albedo_high;  ///< where the table has a range
};

/// A weather table of a run.
struct RunWeather {
    WeatherRecord record;
    Station station;
    bool stop_at_gaps = false;
};

/// Zones to give figures of once the layers are written.
struct ZoneTask {
    PolygonName shapes;
    std::string id = "fid";
    std::vector<std::string> layers;  ///< names of layers the run writes
    std::optional<double> above;
    std::optional<RasterName> cover;  ///< for the shares of classes
};

/// Where a run's light comes from when the sky is not clear.
struct RunLight {
    std::optional<MeasuredReport> measured;
    std::vector<bool> thin;  ///< bands with too little measured: no data; empty: none
    /// Clear-sky index, or the mean cloud, of each pixel: one raster for all bands, or one a band. Dims the
    /// clear sky's light.
    std::vector<Source> rasters;
    bool rasters_are_cloud = false;
    std::vector<double> overcast;  ///< light under a closed cover, by band
};

/// A report for people, once the layers are written.
struct ReportTask {
    std::vector<LayerId> layers{};  ///< what is shown, changes of it too; empty: all
};

/// Everything a plan comes to: resolved, checked and fixed. Shared by all threads.
struct Run {
    std::string title;
    std::string plan_file;  ///< without folders
    std::string plan_digest;
    Grid grid;
    int tile = 512;
    bool overviews = true;  ///< a plain GeoTIFF has none

    std::variant<std::monostate, CoverSurface, GivenSurface, ReflectanceSurface> surface;
    std::optional<Terrain> terrain;  ///< without it the ground is level and open
    double constant_height_m = 0;    ///< then
    Sky sky;                         ///< with the means of what comes from a raster
    std::optional<SkyRaster> sky_raster;
    double light_uncertainty = 0.07;  ///< relative standard uncertainty, the same at all times
    std::shared_ptr<const RunWeather> weather;            ///< nothing without a table
    std::array<bool, weather_quantities> columns_used{};  ///< of that table
    RunLight light;
    Heat heat;
    std::optional<TimePlan> times;
    OutputUnit unit = OutputUnit::w_m2;
    std::vector<OutputLayer> layers;  ///< those of the run as it is come before those of changes
    std::optional<ZoneTask> zones;
    std::vector<Change> changes;
    /// A change that has been carried out: albedo and heights are those after it.
    std::shared_ptr<const Change> carried_out;
    std::optional<ReportTask> report;

    std::vector<InputFile> inputs;
    std::vector<ClassUse> classes;
    std::vector<const Method*> methods;
    std::vector<std::string> assumptions;  ///< what the plan left open, in words
    std::vector<std::string> warnings;

    void use(Weather quantity) { columns_used[static_cast<std::size_t>(quantity)] = true; }
    [[nodiscard]] bool has_surface() const {
        return !std::holds_alternative<std::monostate>(surface);
    }
};

}  // namespace sunbudget
