#pragma once

#include <cstddef>
#include <filesystem>
#include <functional>
#include <span>

#include "sunbudget/raster/polygons.hpp"

namespace sunbudget {

/// Writes a table whose text columns come first; NaN is an empty cell. Throws Error(output).
void write_csv_file(const std::filesystem::path& file, std::span<const FeatureColumn> columns,
                    std::size_t rows, const std::function<FeatureRow(std::size_t)>& row);

}  // namespace sunbudget
