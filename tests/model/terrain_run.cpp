#include "terrain_run.hpp"

#include <gdal_priv.h>
#include <ogr_spatialref.h>

#include <algorithm>
#include <cmath>
#include <numbers>
#include <optional>
#include <stdexcept>

#include "sunbudget/base/parallel.hpp"
#include "sunbudget/base/units.hpp"
#include "sunbudget/physics/quality_bits.hpp"
#include "sunbudget/raster/gdal_setup.hpp"

namespace sunbudget::test {

namespace {

OGRSpatialReference reference_of(const std::string& crs) {
    OGRSpatialReference found;
    if (found.SetFromUserInput(crs.c_str()) != OGRERR_NONE)
        throw std::runtime_error("no CRS " + crs);
    found.SetAxisMappingStrategy(OAMS_TRADITIONAL_GIS_ORDER);
    return found;
}

/// Radii of curvature of the WGS84 ellipsoid: along the meridian, and across it.
std::pair<double, double> radii_m(double latitude_deg) {
    constexpr double a = 6378137.0, f = 1 / 298.257223563, e2 = f * (2 - f);
    const double s = std::sin(rad_from_deg(latitude_deg));
    const double w = 1 - e2 * s * s;
    return {a * (1 - e2) / (w * std::sqrt(w)), a / std::sqrt(w)};
}

void check(CPLErr result, const char* what) {
    if (result != CE_None) throw std::runtime_error(what);
}

/// Keeps finished planes.
class Keeper : public Sink {
  public:
    explicit Keeper(Computed& computed) : computed_(computed) {}
    void put(std::size_t layer, std::size_t band, const Window& window,
             const Plane<float>& plane) override {
        auto& whole = computed_.layers[computed_.run.layers[layer].layer->name][band];
        for (int r = 0; r < window.height; ++r)
            std::copy(plane.row(r).begin(), plane.row(r).end(),
                      whole.row(static_cast<int>(window.row) + r).begin() + window.column);
    }
    void put(std::size_t layer, std::size_t band, const Window& window,
             const Plane<std::uint16_t>& plane) override {
        auto& whole = computed_.layers[computed_.run.layers[layer].layer->name][band];
        for (int r = 0; r < window.height; ++r)
            std::transform(plane.row(r).begin(), plane.row(r).end(),
                           whole.row(static_cast<int>(window.row) + r).begin() + window.column,
                           [](std::uint16_t flag) { return static_cast<float>(flag); });
    }

  private:
    Computed& computed_;
};

}  // namespace

struct Places::State {
    Affine affine{};
    std::unique_ptr<OGRCoordinateTransformation> there, back;
};

Places::Places(const Frame& frame) : state_(std::make_unique<State>()) {
    const auto from = reference_of(frame.crs), to = reference_of("EPSG:4326");
    state_->affine = frame.affine;
    state_->there.reset(OGRCreateCoordinateTransformation(&from, &to));
    state_->back.reset(OGRCreateCoordinateTransformation(&to, &from));
}
Places::~Places() = default;

std::pair<double, double> Places::at(double column, double row) const {
    const auto& t = state_->affine;
    double x = t[0] + t[1] * column + t[2] * row, y = t[3] + t[4] * column + t[5] * row;
    state_->there->Transform(1, &x, &y);
    return {y, x};
}

PixelPlace Places::find(double latitude_deg, double longitude_deg) const {
    double x = longitude_deg, y = latitude_deg;
    state_->back->Transform(1, &x, &y);
    const auto& t = state_->affine;
    const double d = t[1] * t[5] - t[2] * t[4];
    return {((x - t[0]) * t[5] - (y - t[3]) * t[2]) / d,
            ((y - t[3]) * t[1] - (x - t[0]) * t[4]) / d};
}

PixelMatrix Places::matrix(double column, double row) const {
    const auto [latitude, longitude] = at(column, row);
    const auto step = [&](double c, double r) {
        const auto before = at(column - c, row - r), after = at(column + c, row + r);
        const auto a = local_metres(after.first, after.second, latitude, longitude);
        const auto b = local_metres(before.first, before.second, latitude, longitude);
        return LocalMetres{a.east_m - b.east_m, a.north_m - b.north_m};
    };
    const auto across = step(0.5, 0), down = step(0, 0.5);
    return {across.east_m, down.east_m, across.north_m, down.north_m};
}

LocalMetres local_metres(double latitude_deg, double longitude_deg, double latitude0_deg,
                         double longitude0_deg) {
    const auto [meridian, across] = radii_m((latitude_deg + latitude0_deg) / 2);
    return {across * std::cos(rad_from_deg(latitude_deg)) *
                rad_from_deg(std::remainder(longitude_deg - longitude0_deg, 360.0)),
            meridian * rad_from_deg(latitude_deg - latitude0_deg)};
}

Frame frame_about(const std::string& crs, double latitude_deg, double longitude_deg, double cell,
                  int width, int height) {
    const auto from = reference_of("EPSG:4326"), to = reference_of(crs);
    const std::unique_ptr<OGRCoordinateTransformation> transform(
        OGRCreateCoordinateTransformation(&from, &to));
    double x = longitude_deg, y = latitude_deg;
    transform->Transform(1, &x, &y);
    return {crs,
            {x - cell * (width / 2 + 0.5), cell, 0, y + cell * (height / 2 + 0.5), 0, -cell},
            width,
            height};
}

void write_heights(const std::filesystem::path& file, const Frame& frame,
                   const Plane<float>& heights_m, const Stored& stored) {
    gdal_setup(64u << 20);
    auto* driver = GetGDALDriverManager()->GetDriverByName("GTiff");
    const auto type = std::string(stored.type) == "Int16" ? GDT_Int16 : GDT_Float32;
    const GDALDatasetUniquePtr dataset(
        driver->Create(file.c_str(), frame.width, frame.height, 1, type, nullptr));
    if (!dataset) throw std::runtime_error("cannot write " + file.string());
    auto affine = frame.affine;
    const auto crs = reference_of(frame.crs);
    check(dataset->SetGeoTransform(affine.data()), "geotransform");
    check(dataset->SetSpatialRef(&crs), "CRS");
    auto* band = dataset->GetRasterBand(1);
    check(band->SetNoDataValue(stored.nodata), "nodata");
    if (*stored.unit != 0) check(band->SetUnitType(stored.unit), "unit");
    std::vector<float> row(static_cast<std::size_t>(frame.width));
    for (int r = 0; r < frame.height; ++r) {
        std::transform(heights_m.row(r).begin(), heights_m.row(r).end(), row.begin(), [&](float h) {
            return std::isnan(h) ? static_cast<float>(stored.nodata) : h;
        });
        check(band->RasterIO(GF_Write, 0, r, frame.width, 1, row.data(), frame.width, 1,
                             GDT_Float32, 0, 0, nullptr),
              "write");
    }
}

RealRaster read_raster(const std::filesystem::path& file, int band_number) {
    gdal_setup(64u << 20);
    const GDALDatasetUniquePtr dataset(GDALDataset::Open(file.c_str(), GDAL_OF_RASTER));
    if (!dataset) throw std::runtime_error("cannot open " + file.string());
    auto* band = dataset->GetRasterBand(band_number);
    RealRaster found;
    check(dataset->GetGeoTransform(found.frame.affine.data()), "geotransform");
    char* wkt = nullptr;
    dataset->GetSpatialRef()->exportToWkt(&wkt);
    found.frame.crs = wkt;
    CPLFree(wkt);
    found.frame.width = band->GetXSize();
    found.frame.height = band->GetYSize();
    found.values = Plane<float>(found.frame.width, found.frame.height);
    int has_nodata = 0;
    const auto nodata = static_cast<float>(band->GetNoDataValue(&has_nodata));
    for (int r = 0; r < found.frame.height; ++r) {
        const auto row = found.values.row(r);
        check(band->RasterIO(GF_Read, 0, r, found.frame.width, 1, row.data(), found.frame.width, 1,
                             GDT_Float32, 0, 0, nullptr),
              "read");
        if (has_nodata != 0)
            std::replace(row.begin(), row.end(), nodata, std::numeric_limits<float>::quiet_NaN());
    }
    return found;
}

Computed computed(const std::filesystem::path& folder, const std::string& plan,
                  const Manner& manner) {
    gdal_setup(64u << 20);
    Computed result;
    result.run = resolve(parse_plan({(folder / "plan.yaml").string(), "sunbudget: 1\n" + plan, {}}),
                         {manner.threads, std::uint64_t{1} << 30, true});
    auto& run = result.run;
    for (auto& layer : run.layers) {
        if (!manner.rounded) layer.file.quantum = 0;
        auto& bands = result.layers[layer.layer->name];
        for (std::size_t band = 0; band < layer.file.bands.size(); ++band)
            bands.emplace_back(run.grid.width, run.grid.height);
    }
    const SharedLight light(run, manner.threads, folder);
    std::vector<Window> units;
    for (int row = 0; row < run.grid.height; row += manner.unit_px)
        for (int column = 0; column < run.grid.width; column += manner.unit_px)
            units.push_back({column, row, std::min(manner.unit_px, run.grid.width - column),
                             std::min(manner.unit_px, run.grid.height - row)});
    std::vector<std::optional<Flow>> flows(static_cast<std::size_t>(manner.threads));
    Keeper keeper(result);
    parallel_for(units.size(), manner.threads, [&](std::size_t i, int thread) {
        auto& flow = flows[static_cast<std::size_t>(thread)];
        if (!flow) flow.emplace(run, light, thread);
        flow->compute(units[i], keeper);
    });
    for (const auto& flow : flows)
        if (flow)
            for (const auto& [flag, count] : flow->flags()) result.flags[flag] += count;
    return result;
}

Suns suns_over(const PointLight& light, std::size_t band, double latitude_rad, double longitude_rad,
               double height_m) {
    Suns suns{light.path(band, latitude_rad, longitude_rad, height_m), {}};
    suns.around = suns.beam;
    for (auto& sun : suns.around) sun.beam = sun.around;
    return suns;
}

double Errors::percentile(double share) const {
    auto sorted = values;
    for (auto& value : sorted) value = std::abs(value);
    const auto at = std::min(sorted.size() - 1,
                             static_cast<std::size_t>(share * static_cast<double>(sorted.size())));
    std::nth_element(sorted.begin(), sorted.begin() + static_cast<std::ptrdiff_t>(at),
                     sorted.end());
    return sorted[at];
}

double Errors::mean() const {
    double sum = 0;
    for (const double value : values) sum += value;
    return sum / static_cast<double>(values.size());
}

}  // namespace sunbudget::test
