#include "sunbudget/raster/gdal_setup.hpp"

#include <cpl_conv.h>
#include <cpl_error.h>
#include <cpl_string.h>
#include <cpl_vsi_virtual.h>
#include <gdal.h>
#include <gdal_frmts.h>
#include <ogr_srs_api.h>
#include <unistd.h>

#include <algorithm>
#include <array>
#include <atomic>
#include <cctype>
#include <mutex>
#include <set>
#include <string_view>

#include "sunbudget/base/error.hpp"

namespace sunbudget {
namespace {

std::atomic<bool> network_allowed{false};
thread_local GdalMessages* listener = nullptr;

void CPL_STDCALL keep_message(CPLErr level, CPLErrorNum, const char* text) {
    if (listener != nullptr && level >= CE_Warning) listener->add(level >= CE_Failure, text);
}

/// A file system in which nothing exists and nothing can be made.
class RefusingFileSystem final : public VSIFilesystemHandler {
  public:
    VSIVirtualHandle* Open(const char*, const char*, bool, CSLConstList) override {
        return nullptr;
    }
    int Stat(const char*, VSIStatBufL*, int) override { return -1; }
    int Unlink(const char*) override { return -1; }
    int Mkdir(const char*, long) override { return -1; }
    int Rmdir(const char*) override { return -1; }
    int Rename(const char*, const char*) override { return -1; }
    char** ReadDirEx(const char*, int) override { return nullptr; }
};

/// Asked from the library, so that file systems it learns later are refused as well. The new one
/// belongs to GDAL's table, which forgets the old ones without deleting them; one object may stand
/// under two prefixes.
void refuse_file_systems() {
    auto* refusing = new RefusingFileSystem;
    std::set<VSIFilesystemHandler*> replaced;
    char** prefixes = VSIGetFileSystemsPrefixes();
    for (char** prefix = prefixes; prefix != nullptr && *prefix != nullptr; ++prefix) {
        if (std::string_view(*prefix) == "/vsimem/") continue;
        replaced.insert(VSIFileManager::GetHandler(*prefix));
        VSIFileManager::InstallHandler(*prefix, refusing);
    }
    CSLDestroy(prefixes);
    replaced.erase(VSIFileManager::GetHandler("/"));
    replaced.erase(refusing);
    for (auto* handler : replaced) delete handler;
}

struct DriverEntry {
    const char* name;
    void (*enroll)();
};

/// What land cover, elevation, reflectance and albedo come in. Not among them: formats that name
/// further files or servers, that run code, or that hold pictures without a place. VRT waits for a
/// plan that names one.
constexpr std::array driver_table{
    DriverEntry{"GTiff", GDALRegister_GTiff},
    DriverEntry{"HFA", GDALRegister_HFA},          // .img, national land cover
    DriverEntry{"AAIGrid", GDALRegister_AAIGrid},  // .asc elevation
    DriverEntry{"AIG", GDALRegister_AIGrid},       // folders of binary grids
    DriverEntry{"EHdr", GDALRegister_EHdr},        // .bil, .flt
    DriverEntry{"ENVI", GDALRegister_ENVI},        // reflectance
    DriverEntry{"SRTMHGT", GDALRegister_SRTMHGT},
    DriverEntry{"DTED", GDALRegister_DTED},
    DriverEntry{"USGSDEM", GDALRegister_USGSDEM},
    DriverEntry{"JP2OpenJPEG", GDALRegister_JP2OpenJPEG},  // Sentinel-2 bands
    DriverEntry{"netCDF", GDALRegister_netCDF},            // weather grids
};

/// Variables of these families can move pixels by half a cell (GTIFF_POINT_GEO_IGNORE), hide
/// sidecars (GDAL_PAM_ENABLED) or swap axes (OSR_DEFAULT_AXIS_MAPPING_STRATEGY); new ones come with
/// every version. Where the data files of GDAL and PROJ lie stays the machine's business.
bool changes_results(std::string_view name) {
    constexpr std::array families{"GDAL_", "GTIFF_",   "GTiff_", "TIFF_", "OGR_",
                                  "OSR_",  "CPL_",     "VSI_",   "VRT_",  "HFA_",
                                  "OPJ_",  "AAIGRID_", "USE_",   "ESRI_", "PROJ_NETWORK"};
    if (name == "GDAL_DATA") return false;
    return std::any_of(families.begin(), families.end(),
                       [name](const char* family) { return name.starts_with(family); });
}

void clear_environment() {
    std::vector<std::string> names;
    for (char** entry = environ; entry != nullptr && *entry != nullptr; ++entry) {
        const std::string_view text(*entry);
        const auto name = text.substr(0, text.find('='));
        if (changes_results(name)) names.emplace_back(name);
    }
    for (const auto& name : names) unsetenv(name.c_str());
}

/// GDAL's own configuration files (gdalrc) are read when its driver table is made.
void clear_configuration() {
    char** options = CPLGetConfigOptions();
    for (char** option = options; option != nullptr && *option != nullptr; ++option) {
        const std::string text(*option);
        CPLSetConfigOption(text.substr(0, text.find('=')).c_str(), nullptr);
    }
    CSLDestroy(options);
}

void set_up_once(bool allow_network) {
    network_allowed = allow_network;
    CPLSetErrorHandler(keep_message);
    clear_environment();
    GDALGetDriverCount();
    clear_configuration();
    // A damaged JPEG tile is only a warning by default, with made-up pixels.
    CPLSetConfigOption("GDAL_ERROR_ON_LIBJPEG_WARNING", "TRUE");
    CPLSetConfigOption("GDAL_VRT_ENABLE_PYTHON", "NO");
    CPLSetConfigOption("GDAL_NUM_THREADS", "1");
    if (!allow_network) refuse_file_systems();
    OSRSetPROJEnableNetwork(allow_network ? 1 : 0);
    for (const auto& driver : driver_table) driver.enroll();
}

/// "NETCDF:...", "gtiff_dir:...": GDAL does not mind the case.
bool has_driver_prefix(const std::string& name) {
    const auto colon = name.find(':');
    if (colon == std::string::npos || colon < 2) return false;
    return std::all_of(name.begin(), name.begin() + static_cast<std::ptrdiff_t>(colon), [](char c) {
        return (c >= 'A' && c <= 'Z') || (c >= 'a' && c <= 'z') || (c >= '0' && c <= '9') ||
               c == '_';
    });
}

}  // namespace

void gdal_setup(std::uint64_t cache_bytes, bool allow_network) {
    static std::once_flag once;
    std::call_once(once, set_up_once, allow_network);
    GDALSetCacheMax64(static_cast<GIntBig>(cache_bytes));
}

std::vector<std::string> raster_drivers() {
    std::vector<std::string> names;
    for (const auto& driver : driver_table) names.emplace_back(driver.name);
    return names;
}

bool is_special_name(const std::filesystem::path& name) {
    return name.native().find("://") != std::string::npos || name.native().starts_with("/vsi");
}

void refuse_special_name(const std::filesystem::path& name) {
    const auto& text = name.native();
    const bool remote = text.find("://") != std::string::npos;
    if (is_special_name(name) && !network_allowed)
        throw Error(Cause::input, "only local files are read", text,
                    remote ? "fetch it first and name the copy, or give --allow-network"
                           : "unpack or fetch it first and name the copy");
    std::error_code ignored;
    if (text.find('<') != std::string::npos && text.find('>') != std::string::npos &&
        !std::filesystem::exists(name, ignored))
        throw Error(Cause::input, "this is text, not the name of a file", text.substr(0, 60),
                    "name a raster file");
    if (!is_special_name(name) && has_driver_prefix(text) &&
        !std::filesystem::exists(name, ignored))
        throw Error(Cause::input, "names that begin with a format are not read", text,
                    "give the file's own name");
}

GdalMessages::GdalMessages() : outer_(listener) {
    listener = this;
}
GdalMessages::~GdalMessages() {
    listener = outer_;
}

void GdalMessages::add(bool failure, const char* text) {
    constexpr std::size_t most_warnings = 20;
    if (failure) {
        if (failures_++ == 0) first_failure_ = text;
    } else if (warnings_.size() < most_warnings &&
               std::find(warnings_.begin(), warnings_.end(), text) == warnings_.end()) {
        warnings_.emplace_back(text);
    }
}

}  // namespace sunbudget
