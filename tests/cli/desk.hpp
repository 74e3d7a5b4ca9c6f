#pragma once

#include <filesystem>
#include <functional>
#include <string>
#include <vector>

#include "program.hpp"

namespace sunbudget::test {

/// A small land cover raster: bytes, EPSG:32633 from (500000, 5500000), cells of 30 m.
void make_cover(const std::filesystem::path& file, int width, int height,
                const std::function<double(int column, int row)>& code);
/// WorldCover codes in patches of a few cells.
[[nodiscard]] double patchy(int column, int row);

/// A folder with a cover raster of 80 x 60 WorldCover codes, and a plan for it that takes a moment.
class Desk {
  public:
    Desk();
    [[nodiscard]] std::filesystem::path path(const std::string& name = {}) const {
        return folder_.path() / name;
    }
    /// `sunbudget ARGUMENTS`, started in the folder.
    [[nodiscard]] Outcome run(const std::vector<std::string>& arguments,
                              const std::vector<std::string>& environment = {}) const {
        return sunbudget(arguments, {folder_.path().string(), environment});
    }

  private:
    TemporaryFolder folder_;
};

/// Every band's pixels, as doubles, band after band; NaN for nodata.
[[nodiscard]] std::vector<double> pixels_of(const std::filesystem::path& raster);
/// Equal value for value, NaN equal to NaN.
[[nodiscard]] bool same_pixels(const std::vector<double>& a, const std::vector<double>& b);
/// Mean of the pixels that have a value.
[[nodiscard]] double mean_of(const std::vector<double>& pixels);

/// Catch2 matcher by another name: each line of `text` begins with "sunbudget: error: ", "sunbudget:
/// warning: " or "sunbudget: " and holds no control character.
[[nodiscard]] bool well_formed(const std::string& text);

}  // namespace sunbudget::test
