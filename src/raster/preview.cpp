#include "sunbudget/raster/preview.hpp"

#include <gdal_priv.h>

#include <algorithm>
#include <array>
#include <cmath>
#include <limits>
#include <vector>

#include "dataset.hpp"
#include "sunbudget/base/error.hpp"
#include "sunbudget/raster/gdal_setup.hpp"

namespace sunbudget {

namespace {

namespace fs = std::filesystem;

int side(GDALRasterBand& band) {
    return std::max(band.GetXSize(), band.GetYSize());
}

/// The largest level that fits, else the smallest there is.
GDALRasterBand& level_for(GDALRasterBand& whole, int most_px) {
    GDALRasterBand* best = &whole;
    for (int i = 0; i < whole.GetOverviewCount() && side(*best) > most_px; ++i)
        if (auto* level = whole.GetOverview(i); level != nullptr && side(*level) < side(*best))
            best = level;
    return *best;
}

/// Sums and counts of the squares of one row of the result.
class Squares {
  public:
    Squares(int width, int across, bool mean)
        : sum_(static_cast<std::size_t>(width)),
          count_(sum_.size()),
          across_(across),
          mean_(mean) {}
    void add(std::span<const float> row) {
        for (std::size_t i = 0; i < row.size(); ++i) {
            const auto at = i / static_cast<std::size_t>(across_);
            if (std::isnan(row[i]) || (!mean_ && count_[at] > 0)) continue;
            sum_[at] += static_cast<double>(row[i]);
            count_[at] += 1;
        }
    }
    void write(std::span<float> out) {
        for (std::size_t i = 0; i < out.size(); ++i)
            out[i] = static_cast<float>(sum_[i] / count_[i]);  // 0 / 0 is NaN
        std::ranges::fill(sum_, 0.0);
        std::ranges::fill(count_, 0.0);
    }

  private:
    std::vector<double> sum_, count_;
    int across_;
    bool mean_;
};

void read_row(GDALRasterBand& band, int row, std::span<float> out, const fs::path& file) {
    const GdalMessages messages;
    if (band.RasterIO(GF_Read, 0, row, band.GetXSize(), 1, out.data(), band.GetXSize(), 1,
                      GDT_Float32, 0, 0, nullptr) != CE_None)
        throw Error(Cause::input,
                    "cannot read a layer for its picture: " + messages.first_failure(),
                    file.native());
}

}  // namespace

Plane<float> preview(const fs::path& file, int band, int most_px) {
    const GdalMessages messages;
    constexpr std::array<const char*, 2> drivers{"GTiff", nullptr};
    const DatasetPtr dataset(GDALDataset::Open(fs::absolute(file).c_str(),
                                               GDAL_OF_RASTER | GDAL_OF_READONLY, drivers.data(),
                                               nullptr, nullptr));
    if (dataset == nullptr)
        throw Error(Cause::input,
                    "cannot open a layer for its picture: " + messages.first_failure(),
                    file.native());
    auto& level = level_for(*dataset->GetRasterBand(band), most_px);
    const int across = (side(level) + most_px - 1) / most_px;
    Plane<float> small((level.GetXSize() + across - 1) / across,
                       (level.GetYSize() + across - 1) / across);
    std::vector<float> row(static_cast<std::size_t>(level.GetXSize()));
    Squares squares(small.width(), across, level.GetRasterDataType() == GDT_Float32);
    for (int r = 0; r < level.GetYSize(); ++r) {
        read_row(level, r, row, file);
        squares.add(row);
        if ((r + 1) % across == 0 || r + 1 == level.GetYSize())
            squares.write(small.row(r / across));
    }
    return small;
}

}  // namespace sunbudget
