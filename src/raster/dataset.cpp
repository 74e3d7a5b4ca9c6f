#include "dataset.hpp"

#include <gdal_frmts.h>
#include <gdal_priv.h>

#include <algorithm>
#include <array>
#include <fstream>
#include <system_error>

#include "sunbudget/base/error.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/raster/gdal_setup.hpp"

namespace sunbudget {
namespace {

namespace fs = std::filesystem;

std::string first_bytes(const fs::path& path) {
    std::array<char, 16> bytes{};
    std::ifstream in(path, std::ios::binary);
    in.read(bytes.data(), bytes.size());
    return {bytes.data(), static_cast<std::size_t>(in.gcount())};
}

bool looks_like_tiff(const std::string& bytes) {
    return bytes.starts_with("II*") || bytes.starts_with("II+") ||
           bytes.starts_with(std::string_view("MM\0*", 4)) ||
           bytes.starts_with(std::string_view("MM\0+", 4));
}

[[noreturn]] void throw_missing(const fs::path& path) {
    std::error_code failed;
    const auto folder = path.has_parent_path() ? path.parent_path() : fs::path(".");
    if (!fs::is_directory(folder, failed))
        throw Error(Cause::input, "no such folder", folder.native(), "check the path");
    std::vector<std::string> names;
    for (const auto& entry : fs::directory_iterator(folder, failed))
        names.push_back(entry.path().filename().native());
    const auto near = nearest_name(path.filename().native(), names);
    throw Error(Cause::input, "no such file", path.native(),
                near ? "did you mean \"" + *near + "\"?" : "check the name");
}

/// A pipe would block, a device is never a raster.
void check_file(const fs::path& path) {
    std::error_code failed;
    const auto status = fs::status(path, failed);
    if (!fs::exists(status)) throw_missing(path);
    if (fs::is_directory(status)) return;
    if (!fs::is_regular_file(status))
        throw Error(Cause::input, "this is no regular file", path.native(), "name a raster file");
    if (fs::file_size(path, failed) == 0)
        throw Error(Cause::input, "the file is empty (0 bytes)", path.native(), "fetch it again");
    if (!std::ifstream(path))
        throw Error(Cause::input, "the file may not be read", path.native(),
                    "check its permissions");
}

/// GDAL repeats the file's name, some formats twice.
std::string without_name(std::string text, const std::string& name) {
    for (auto at = text.find(name); at != std::string::npos; at = text.find(name))
        text.erase(at, text.find_first_not_of(": ", at + name.size()) - at);
    return text;
}

[[noreturn]] void throw_unreadable(const fs::path& path, const GdalMessages& messages) {
    if (is_special_name(path))
        throw Error(Cause::input,
                    "the remote file cannot be opened" +
                        (messages.failed() ? ": " + messages.first_failure() : std::string()),
                    path.native(), "check the address, or fetch it first and name the copy");
    std::error_code failed;
    if (fs::is_directory(path, failed))
        throw Error(Cause::input, "this is a folder", path.native(), "name a raster file in it");
    const auto bytes = first_bytes(path);
    if (looks_like_tiff(bytes))
        throw Error(Cause::input,
                    "the TIFF header is damaged or cut short: " +
                        without_name(messages.first_failure(), fs::absolute(path).native()),
                    path.native(), "fetch the file again");
    const bool text = bytes.starts_with("<") || bytes.starts_with("{");
    throw Error(Cause::input,
                text ? "this is text (a web page or a description?), not a raster"
                     : "this is in no raster format known here",
                path.native(),
                "give one of: " + joined(raster_drivers(), ", ") +
                    "; others turn into GeoTIFF "
                    "with gdal_translate");
}

std::string lower_extension(const fs::path& path) {
    return lower_case(path.extension().native());
}

/// What GDAL is given: an absolute path, so that no prefix of the name can mean a driver.
std::string gdal_name(const RasterName& name) {
    if (!is_special_name(name.path)) return fs::absolute(name.path).native();
    const auto& text = name.path.native();
    return text.starts_with("http") ? "/vsicurl/" + text : text;
}

/// Without overviews, since a file's tags and sidecars can name any other file as its overview.
constexpr const char* no_overviews = "OVERVIEW_LEVEL=NONE";

DatasetPtr open_with(const std::string& name, std::vector<const char*> drivers,
                     const char* option) {
    drivers.push_back(nullptr);
    const std::array<const char*, 2> options{option, nullptr};
    return DatasetPtr(GDALDataset::Open(name.c_str(), GDAL_OF_RASTER | GDAL_OF_READONLY,
                                        drivers.data(), options.data(), nullptr));
}

/// The variables of a netCDF file that has several. Such a file has no bands of its own, and GDAL
/// opens it only with overviews left on; its pixels are never read this way.
std::vector<std::string> netcdf_variables(const RasterName& name) {
    const auto file = open_with(gdal_name(name), {"netCDF"}, nullptr);
    std::vector<std::string> variables;
    if (file == nullptr || file->GetRasterCount() > 0) return variables;
    char** list = file->GetMetadata("SUBDATASETS");
    for (int i = 0; list != nullptr && list[i] != nullptr; ++i) {
        const std::string item(list[i]);
        if (item.find("_NAME=") != std::string::npos)
            variables.push_back(item.substr(item.rfind(':') + 1));
    }
    return variables;
}

DatasetPtr open_variable(const RasterName& name) {
    const auto variables = netcdf_variables(name);
    if (variables.empty()) return nullptr;
    const bool known =
        std::find(variables.begin(), variables.end(), name.band_name) != variables.end();
    if (!known || name.path.native().find('"') != std::string::npos)
        throw Error(Cause::input, "the file holds several rasters", text_of(name),
                    "name one as PATH:NAME; it has " + joined(variables, ", "));
    return open_with("NETCDF:\"" + gdal_name(name) + "\":" + name.band_name, {"netCDF"},
                     no_overviews);
}

/// Decoded from the last blocks back: a cut file lacks those.
bool ends_beyond(GDALRasterBand& band, std::uintmax_t bytes) {
    int width = 0, height = 0;
    band.GetBlockSize(&width, &height);
    const int columns = (band.GetXSize() - 1) / width + 1;
    const int rows = (band.GetYSize() - 1) / height + 1;
    const auto item = [&band](const char* what, int column, int row) {
        const auto name =
            std::string(what) + '_' + std::to_string(column) + '_' + std::to_string(row);
        const char* text = band.GetMetadataItem(name.c_str(), "TIFF");
        return text == nullptr ? std::int64_t{0} : parse_integer(text).value_or(0);
    };
    for (int row = rows - 1; row >= 0; --row)
        for (int column = columns - 1; column >= 0; --column) {
            const auto offset = item("BLOCK_OFFSET", column, row);
            const auto size = item("BLOCK_SIZE", column, row);
            // Blocks of a sparse file have offset and size 0.
            if (offset < 0 || size < 0 || static_cast<std::uintmax_t>(offset + size) > bytes)
                return true;
        }
    return false;
}

}  // namespace

void CloseDataset::operator()(GDALDataset* dataset) const noexcept {
    GDALClose(dataset);
}

DatasetPtr open_dataset(const RasterName& name) {
    refuse_special_name(name.path);
    if (!is_special_name(name.path)) check_file(name.path);
    const auto known = raster_drivers();
    std::vector<const char*> drivers;
    for (const auto& driver : known) drivers.push_back(driver.c_str());
    if (lower_extension(name.path) == ".vrt") {
        GDALRegister_VRT();
        drivers = {"VRT"};
    }
    const GdalMessages messages;
    auto dataset = open_with(gdal_name(name), std::move(drivers), no_overviews);
    if (dataset == nullptr) dataset = open_variable(name);
    if (dataset == nullptr) throw_unreadable(name.path, messages);
    return dataset;
}

std::vector<std::string> band_descriptions(GDALDataset& dataset, const RasterName& name) {
    const auto names_in = [](GDALDataset& file) {
        std::vector<std::string> names;
        for (int band = 1; band <= file.GetRasterCount(); ++band)
            names.emplace_back(file.GetRasterBand(band)->GetDescription());
        return names;
    };
    const std::string driver = dataset.GetDriverName();
    if (driver == "netCDF") return names_in(dataset);
    const GdalMessages messages;
    const auto plain = open_with(gdal_name(name), {driver.c_str()}, nullptr);
    return names_in(
        plain != nullptr && plain->GetRasterCount() == dataset.GetRasterCount() ? *plain : dataset);
}

void refuse_cut_file(GDALRasterBand& band, const std::filesystem::path& path) {
    std::error_code failed;
    const auto bytes = fs::file_size(path, failed);
    if (failed || std::string_view(band.GetDataset()->GetDriverName()) != "GTiff") return;
    GDALRasterBand* mask = band.GetMaskFlags() == GMF_PER_DATASET ? band.GetMaskBand() : nullptr;
    // A mask in a .msk file has its own length.
    const bool own_mask = mask != nullptr && mask->GetDataset() == band.GetDataset();
    if (ends_beyond(band, bytes) || (own_mask && ends_beyond(*mask, bytes)))
        throw Error(Cause::input, "the file is cut short: blocks lie beyond its end",
                    path.native() + ", " + std::to_string(bytes) + " bytes", "fetch it again");
}

}  // namespace sunbudget
