#pragma once

#include <array>
#include <cstdint>
#include <filesystem>
#include <map>
#include <memory>
#include <string>
#include <utility>
#include <vector>

#include "sunbudget/base/plane.hpp"
#include "sunbudget/model/flow.hpp"
#include "sunbudget/physics/direction.hpp"
#include "sunbudget/plan/resolve.hpp"
#include "sunbudget/raster/locator.hpp"

namespace sunbudget::test {

/// Where a made raster lies.
struct Frame {
    std::string crs;  ///< as GDAL takes it: EPSG:32633
    Affine affine{0, 10, 0, 0, 0, -10};
    int width = 0, height = 0;
};
/// A frame of square cells around a place: its middle pixel's centre lies there.
[[nodiscard]] Frame frame_about(const std::string& crs, double latitude_deg, double longitude_deg,
                                double cell, int width, int height);

/// Latitude and longitude in degrees of a point of a frame, counted from its outer corner, by PROJ alone.
class Places {
  public:
    explicit Places(const Frame& frame);
    ~Places();
    [[nodiscard]] std::pair<double, double> at(double column, double row) const;
    /// The pixel place of a latitude and longitude.
    [[nodiscard]] PixelPlace find(double latitude_deg, double longitude_deg) const;
    /// The pixel matrix at a point, from the ellipsoid's radii of curvature: not the program's way.
    [[nodiscard]] PixelMatrix matrix(double column, double row) const;

  private:
    struct State;
    std::unique_ptr<State> state_;
};

/// Metres north and east of a place along the ellipsoid's curves, for distances of a few kilometres.
struct LocalMetres {
    double east_m, north_m;
};
[[nodiscard]] LocalMetres local_metres(double latitude_deg, double longitude_deg,
                                       double latitude0_deg, double longitude0_deg);

struct Stored {
    const char* type = "Float32";  ///< or Int16
    const char* unit = "";
    double nodata = -9999;  ///< NaN is written as this
};
void write_heights(const std::filesystem::path& file, const Frame& frame,
                   const Plane<float>& heights_m, const Stored& stored = {});

struct RealRaster {
    Frame frame;
    Plane<float> values;  ///< nodata is NaN
};
[[nodiscard]] RealRaster read_raster(const std::filesystem::path& file, int band = 1);

struct Computed {
    Run run;
    std::map<std::string, std::vector<Plane<float>>> layers;
    std::map<std::uint16_t, std::uint64_t> flags;

    [[nodiscard]] const Plane<float>& operator[](const std::string& layer) const {
        return layers.at(layer).front();
    }
};

/// The suns of a band over a place: beams, and the light from around each.
struct Suns {
    std::vector<SunStep> beam, around;
};
[[nodiscard]] Suns suns_over(const PointLight& light, std::size_t band, double latitude_rad,
                             double longitude_rad, double height_m);

struct Manner {
    int threads = 2;
    int unit_px = 512;     ///< side of the windows that are computed at once
    bool rounded = false;  ///< to the stored quantum
};
/// Reads a plan (`sunbudget: 1` is put in front), resolves it and computes every layer.
[[nodiscard]] Computed computed(const std::filesystem::path& folder, const std::string& plan,
                                const Manner& manner = {});

/// Numbers found, for a table of how far they lie.
struct Errors {
    std::vector<double> values;
    void add(double value) { values.push_back(value); }
    /// Of the sizes; share in [0, 1].
    [[nodiscard]] double percentile(double share) const;
    [[nodiscard]] double mean() const;
};

}  // namespace sunbudget::test
