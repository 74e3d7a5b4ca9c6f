#include "input_support.hpp"

#include <fmt/format.h>
#include <gdal_priv.h>

#include <cstdlib>
#include <cstring>
#include <fstream>
#include <stdexcept>

#include "sunbudget/base/error.hpp"
#include "sunbudget/raster/gdal_setup.hpp"
#include "sunbudget/raster/grid_build.hpp"

namespace sunbudget::test {

namespace fs = std::filesystem;

namespace {
const bool ready = [] {
    gdal_setup(std::uint64_t{64} << 20);
    return true;
}();

void write_band(GDALRasterBand& band, const std::function<double(int, int)>& value) {
    std::vector<double> row(static_cast<std::size_t>(band.GetXSize()));
    for (int r = 0; r < band.GetYSize(); ++r) {
        for (int c = 0; c < band.GetXSize(); ++c) row[static_cast<std::size_t>(c)] = value(c, r);
        if (band.RasterIO(GF_Write, 0, r, band.GetXSize(), 1, row.data(), band.GetXSize(), 1,
                          GDT_Float64, 0, 0, nullptr) != CE_None)
            throw std::runtime_error("cannot write a test raster");
    }
}
}  // namespace

Grid square_grid(int width, int height, double west, double north, double cell,
                 const std::string& crs) {
    return {width, height, {west, cell, 0, north, 0, -cell}, crs_wkt_of(crs)};
}

namespace {

GDALDataset* created(const fs::path& path, const MadeRaster& raster, int bands) {
    auto* driver = GetGDALDriverManager()->GetDriverByName("GTiff");
    std::vector<const char*> options;
    for (const auto& option : raster.options) options.push_back(option.c_str());
    options.push_back(nullptr);
    auto* made = driver->Create(path.c_str(), raster.grid.width, raster.grid.height, bands,
                                GDALGetDataTypeByName(raster.type.c_str()),
                                const_cast<char**>(options.data()));
    if (made == nullptr) throw std::runtime_error("cannot make " + path.string());
    auto affine = raster.grid.affine;
    made->SetGeoTransform(affine.data());
    if (!raster.grid.crs_wkt.empty()) made->SetProjection(raster.grid.crs_wkt.c_str());
    for (const auto& [key, value, domain] : raster.metadata)
        made->SetMetadataItem(key.c_str(), value.c_str(),
                              domain.empty() ? nullptr : domain.c_str());
    return made;
}

void set_nodata(GDALRasterBand& band, double nodata) {
    if (band.GetRasterDataType() == GDT_Int64)
        band.SetNoDataValueAsInt64(static_cast<std::int64_t>(nodata));
    else if (band.GetRasterDataType() == GDT_UInt64)
        band.SetNoDataValueAsUInt64(static_cast<std::uint64_t>(nodata));
    else
        band.SetNoDataValue(nodata);
}

}  // namespace

fs::path make_empty_raster(const fs::path& path, const MadeRaster& raster) {
    GDALClose(created(path, raster, 1));
    return path;
}

fs::path make_raster(const fs::path& path, const MadeRaster& raster) {
    CPLSetThreadLocalConfigOption("GDAL_TIFF_INTERNAL_MASK", "YES");
    auto* made = created(path, raster, static_cast<int>(raster.bands.size()));
    for (int b = 1; b <= made->GetRasterCount(); ++b) {
        auto& band = *made->GetRasterBand(b);
        if (raster.nodata) set_nodata(band, *raster.nodata);
        if (raster.scaling) {
            band.SetScale(raster.scaling->scale);
            band.SetOffset(raster.scaling->offset);
        }
        write_band(band, raster.bands[static_cast<std::size_t>(b - 1)]);
    }
    if (raster.mask) {
        made->CreateMaskBand(GMF_PER_DATASET);
        write_band(*made->GetRasterBand(1)->GetMaskBand(),
                   [&](int c, int r) { return raster.mask(c, r) ? 255.0 : 0.0; });
    }
    GDALClose(made);
    return path;
}

fs::path awkward(const std::string& name) {
    const auto path = real_data("awkward/" + name);
    if (!path) throw std::runtime_error("no awkward file " + name);
    return *path;
}

SourceSpec spec_of(const fs::path& path, DataKind kind) {
    SourceSpec spec;
    spec.name = raster_name(path.native());
    spec.kind = kind;
    return spec;
}

Plane<float> read_all(const SourceSpec& spec, const std::optional<Grid>& target) {
    const auto grid = target ? *target : inspect(spec.name).grid;
    const auto source = Source::open(spec, grid);
    Plane<float> out;
    Reader(source).read({0, 0, grid.width, grid.height}, out);
    return out;
}

Plane<std::int32_t> read_all_codes(SourceSpec spec, const std::optional<Grid>& target) {
    spec.kind = DataKind::code;
    const auto grid = target ? *target : inspect(spec.name).grid;
    const auto source = Source::open(spec, grid);
    Plane<std::int32_t> out;
    Reader(source).read_codes({0, 0, grid.width, grid.height}, out);
    return out;
}

template <typename Value>
bool same_bits(const Plane<Value>& a, const Plane<Value>& b) {
    if (a.width() != b.width() || a.height() != b.height()) return false;
    for (int r = 0; r < a.height(); ++r)
        if (std::memcmp(a.row(r).data(), b.row(r).data(), a.row(r).size_bytes()) != 0) return false;
    return true;
}
template bool same_bits(const Plane<float>&, const Plane<float>&);
template bool same_bits(const Plane<std::int32_t>&, const Plane<std::int32_t>&);

Plane<float> warped_by_gdal(const fs::path& from, const Grid& target,
                            const std::string& arguments) {
    const TemporaryFolder folder;
    const auto crs = folder.path() / "crs.wkt", to = folder.path() / "to.tif";
    std::ofstream(crs) << target.crs_wkt;
    const auto box = bounds_of(target);
    const auto command = fmt::format(
        "gdalwarp -q -ot Float32 -dstnodata nan -ovr NONE -t_srs {} -te {} {} {} {} -ts {} {} {} "
        "'{}' {} 2> /dev/null",
        crs.native(), box.west, box.south, box.east, box.north, target.width, target.height,
        arguments, from.native(), to.native());
    if (std::system(command.c_str()) != 0) throw std::runtime_error("failed: " + command);
    return read_all(spec_of(to));
}

std::string error_text(const std::function<void()>& call) {
    try {
        call();
    } catch (const Error& error) {
        return error.what();
    }
    return {};
}

}  // namespace sunbudget::test
