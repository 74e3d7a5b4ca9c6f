#include "desk.hpp"

#include <gdal_priv.h>

#include <algorithm>
#include <cmath>
#include <limits>
#include <sstream>
#include <stdexcept>

#include "raster/input_support.hpp"

namespace sunbudget::test {

namespace fs = std::filesystem;

void make_cover(const fs::path& file, int width, int height,
                const std::function<double(int, int)>& code) {
    MadeRaster raster;
    raster.grid = square_grid(width, height, 500000, 5500000, 30);
    raster.type = "Byte";
    raster.bands = {code};
    make_raster(file, raster);
}

double patchy(int column, int row) {
    constexpr int codes[] = {10, 20, 30, 40, 50, 60, 80, 90};
    return codes[((column / 7) * 5 + (row / 9) * 3) % 8];
}

Desk::Desk() {
    make_cover(path("cover.tif"), 80, 60, patchy);
    write(path("plan.yaml"),
          "sunbudget: 1\n"
          "surface:\n"
          "  cover: {raster: cover.tif, classes: worldcover}\n"
          "time: {at: 2025-06-21T12:00Z}\n"
          "outputs: {directory: out, layers: [albedo, net_shortwave]}\n");
}

std::vector<double> pixels_of(const fs::path& raster) {
    const std::unique_ptr<GDALDataset> opened(GDALDataset::Open(raster.c_str(), GDAL_OF_RASTER));
    if (!opened) throw std::runtime_error("cannot open " + raster.string());
    const int width = opened->GetRasterXSize(), height = opened->GetRasterYSize();
    std::vector<double> all;
    for (auto* band : opened->GetBands()) {
        std::vector<double> pixels(static_cast<std::size_t>(width) *
                                   static_cast<std::size_t>(height));
        if (band->RasterIO(GF_Read, 0, 0, width, height, pixels.data(), width, height, GDT_Float64,
                           0, 0, nullptr) != CE_None)
            throw std::runtime_error("cannot read " + raster.string());
        int has_nodata = 0;
        const double nodata = band->GetNoDataValue(&has_nodata);
        for (auto& value : pixels)
            if (has_nodata != 0 && value == nodata)
                value = std::numeric_limits<double>::quiet_NaN();
        all.insert(all.end(), pixels.begin(), pixels.end());
    }
    return all;
}

bool same_pixels(const std::vector<double>& a, const std::vector<double>& b) {
    return std::equal(a.begin(), a.end(), b.begin(), b.end(), [](double x, double y) {
        return x == y || (std::isnan(x) && std::isnan(y));
    });
}

double mean_of(const std::vector<double>& pixels) {
    double sum = 0, count = 0;
    for (const double value : pixels)
        if (!std::isnan(value)) {
            sum += value;
            ++count;
        }
    return sum / count;
}

bool well_formed(const std::string& text) {
    std::istringstream lines(text);
    for (std::string line; std::getline(lines, line);)
        if (!line.starts_with("sunbudget: ") ||
            std::any_of(line.begin(), line.end(), [](char c) { return c > 0 && c < 32; }))
            return false;
    return text.empty() || text.back() == '\n';
}

}  // namespace sunbudget::test
