#pragma once

#include <cstddef>
#include <cstdint>
#include <exception>
#include <memory>
#include <span>
#include <string>
#include <vector>

#include "sunbudget/raster/output_file.hpp"

struct tiff;  // libtiff's TIFF

namespace sunbudget {

/// libtiff at work on one of our files, or on a TIFF in memory. What it reports is kept, never
/// printed; the georeference and metadata tags are known to it.
class TiffHandle {
  public:
    /// mode: libtiff's ("w4", "w8", "r+", "r"). The file must outlive the handle.
    TiffHandle(OutputFile& file, const char* mode);
    /// Reads a TIFF in memory, which must outlive the handle.
    TiffHandle(std::span<const std::byte> memory, const std::string& name);
    ~TiffHandle();
    TiffHandle(const TiffHandle&) = delete;
    TiffHandle& operator=(const TiffHandle&) = delete;

    [[nodiscard]] tiff* get() const noexcept { return tiff_; }
    /// Throws Error(output) with libtiff's or the system's reason unless `success`.
    void require(bool success, const char* what) const;
    /// Makes libtiff write what it still holds and closes it; throws as `require`.
    void close();
    /// Tells libtiff about the tags of GeoTIFF and GDAL; needed again for each new directory.
    void know_tags() const;

  private:
    struct Source;
    void open(const std::string& name, const char* mode);

    std::unique_ptr<Source> source_;
    tiff* tiff_ = nullptr;
};

}  // namespace sunbudget
