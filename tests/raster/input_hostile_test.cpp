#include <arpa/inet.h>
#include <cpl_conv.h>
#include <gdal_priv.h>
#include <netinet/in.h>
#include <poll.h>
#include <sys/socket.h>
#include <sys/stat.h>
#include <unistd.h>

#include <catch2/catch.hpp>
#include <cmath>
#include <fstream>

#include "input_support.hpp"
#include "raster/dataset.hpp"
#include "sunbudget/raster/gdal_setup.hpp"
#include "sunbudget/raster/grid_build.hpp"

using namespace sunbudget;
using namespace sunbudget::test;
using Catch::Matchers::Contains;
namespace fs = std::filesystem;

namespace {

/// Listens on the loopback and tells whether anybody called.
class Listener {
  public:
    Listener() : socket_(::socket(AF_INET, SOCK_STREAM, 0)) {
        sockaddr_in address{};
        address.sin_family = AF_INET;
        address.sin_addr.s_addr = htonl(INADDR_LOOPBACK);
        socklen_t size = sizeof address;
        REQUIRE(::bind(socket_, reinterpret_cast<sockaddr*>(&address), size) == 0);
        REQUIRE(::listen(socket_, 8) == 0);
        ::getsockname(socket_, reinterpret_cast<sockaddr*>(&address), &size);
        port_ = ntohs(address.sin_port);
        // A call that should not happen must not hang the test.
        CPLSetConfigOption("GDAL_HTTP_TIMEOUT", "2");
    }
    ~Listener() { ::close(socket_); }
    Listener(const Listener&) = delete;
    Listener& operator=(const Listener&) = delete;
    [[nodiscard]] bool called() const {
        pollfd waiting{socket_, POLLIN, 0};
        return ::poll(&waiting, 1, 0) > 0;
    }
    [[nodiscard]] std::string url(const std::string& name) const {
        return "/vsicurl/http://127.0.0.1:" + std::to_string(port_) + '/' + name;
    }

  private:
    int socket_;
    int port_ = 0;
};

constexpr double own = 1, foreign = 77;

/// A raster of ones, large enough that a decimated read would use overviews.
MadeRaster ones() {
    return {.grid = square_grid(64, 64, 0, 640, 10), .type = "Byte", .bands = {[](int, int) {
                                                                         return own;
                                                                     }}};
}
fs::path secret(const fs::path& folder) {
    auto raster = ones();
    raster.grid = square_grid(32, 32, 0, 640, 20);
    raster.bands = {[](int, int) { return foreign; }};
    return make_raster(folder / "secret.tif", raster);
}

std::string vrt_text(const std::string& source) {
    return "<VRTDataset rasterXSize=\"32\" rasterYSize=\"32\"><VRTRasterBand dataType=\"Byte\" "
           "band=\"1\">"
           "<SimpleSource><SourceFilename relativeToVRT=\"0\">" +
           source +
           "</SourceFilename><SourceBand>1</SourceBand></SimpleSource></VRTRasterBand></"
           "VRTDataset>";
}
void write(const fs::path& path, const std::string& text) {
    std::ofstream(path) << text;
}

void write_aux(const fs::path& raster, const std::string& overview) {
    write(raster.native() + ".aux.xml",
          "<PAMDataset><Metadata domain=\"OVERVIEWS\"><MDI key=\"OVERVIEW_FILE\">" + overview +
              "</MDI></Metadata></PAMDataset>");
}

/// Everything we ask of a raster, and what a quick look would ask.
void look_closely(const fs::path& file) {
    const auto pixels = read_all(spec_of(file));
    for (int r = 0; r < pixels.height(); ++r)
        for (const float value : pixels.row(r)) REQUIRE(value == static_cast<float>(own));
    const GdalMessages messages;
    const auto dataset = open_dataset({file});
    auto& band = *dataset->GetRasterBand(1);
    CHECK(band.GetOverviewCount() == 0);
    unsigned char one = 0;
    CHECK(band.RasterIO(GF_Read, 0, 0, 64, 64, &one, 1, 1, GDT_Byte, 0, 0, nullptr) == CE_None);
    CHECK(one == static_cast<unsigned char>(own));
}

}  // namespace

TEST_CASE("hostile raster: a description named .tif is refused", "[raster][edge]") {
    const TemporaryFolder folder;
    const auto file = folder.path() / "evil.tif";
    write(file, vrt_text("/etc/hostname"));
    CHECK_THAT(error_text([&] { (void)inspect({file}); }), Contains("this is text"));
    // Also after some plan named a real .vrt.
    const auto real = folder.path() / "good.vrt";
    const auto tile = make_raster(folder.path() / "tile.tif", ones());
    const auto command = "gdal_translate -q -of VRT " + tile.string() + ' ' + real.string();
    REQUIRE(std::system(command.c_str()) == 0);
    CHECK(inspect({real}).driver == "VRT");
    CHECK_THAT(error_text([&] { (void)inspect({file}); }), Contains("this is text"));
}

TEST_CASE("hostile raster: sidecars and tags reach neither the network nor other files",
          "[raster][edge]") {
    const TemporaryFolder folder;
    const Listener listener;
    // The last time with VRT known, as after a plan that names one.
    if (GENERATE(false, true)) GDALRegister_VRT();
    const auto file = folder.path() / "ones.tif";
    const auto local = secret(folder.path()).native();

    SECTION("an .aux.xml that names a URL") {
        make_raster(file, ones());
        write_aux(file, listener.url("a.tif"));
    }
    SECTION("an .aux.xml that names a local raster") {
        make_raster(file, ones());
        write_aux(file, local);
    }
    SECTION("an .ovr that describes a URL") {
        make_raster(file, ones());
        write(file.native() + ".ovr", vrt_text(listener.url("o.tif")));
    }
    SECTION("an .ovr that describes a local raster") {
        make_raster(file, ones());
        write(file.native() + ".ovr", vrt_text(local));
    }
    SECTION("a tag that names a URL") {
        auto raster = ones();
        raster.metadata = {{"OVERVIEW_FILE", listener.url("t.tif"), "OVERVIEWS"}};
        make_raster(file, raster);
    }
    SECTION("a tag that names a URL without extension") {
        auto raster = ones();
        raster.metadata = {{"OVERVIEW_FILE", listener.url("t"), "OVERVIEWS"}};
        make_raster(file, raster);
    }
    SECTION("a tag that names a local raster") {
        auto raster = ones();
        raster.metadata = {{"OVERVIEW_FILE", local, "OVERVIEWS"}};
        make_raster(file, raster);
    }
    look_closely(file);
    CHECK_FALSE(listener.called());
}

TEST_CASE("hostile raster: a mask that describes a URL is not fetched", "[raster][edge]") {
    const TemporaryFolder folder;
    const Listener listener;
    if (GENERATE(false, true)) GDALRegister_VRT();
    const auto file = make_raster(folder.path() / "ones.tif", ones());
    write(file.native() + ".msk", vrt_text(listener.url("m.tif")));
    // With VRT known the mask opens and cannot be read: an error is right, silence is not.
    const auto error = error_text([&] { look_closely(file); });
    CHECK((error.empty() || error.find("pixels cannot be read") != std::string::npos));
    CHECK_FALSE(listener.called());
}

TEST_CASE("hostile raster: a plan's own .vrt reaches local files only", "[raster][edge]") {
    const TemporaryFolder folder;
    const Listener listener;
    const auto file = folder.path() / "far.vrt";
    write(
        file,
        "<VRTDataset rasterXSize=\"32\" rasterYSize=\"32\"><SRS>EPSG:32633</SRS>"
        "<GeoTransform>0, 20, 0, 640, 0, -20</GeoTransform>" +
            vrt_text(listener.url("v.tif"))
                .substr(std::string("<VRTDataset rasterXSize=\"32\" rasterYSize=\"32\">").size()));
    CHECK_THAT(error_text([&] { (void)read_all(spec_of(file)); }),
               Contains("pixels cannot be read"));
    CHECK_FALSE(listener.called());
}

TEST_CASE("hostile names: only plain local files are opened", "[raster][edge]") {
    for (const char* name :
         {"/vsicurl/http://127.0.0.1:9/a.tif", "/vsis3/bucket/a.tif", "/vsizip/a.zip/a.tif",
          "/vsistdin/", "http://127.0.0.1:9/a.tif", "s3://bucket/a.tif", "/vsimem/a.tif"})
        CHECK_THAT(error_text([&] { (void)inspect({name}); }),
                   Contains("only local files are read"));
    for (const char* name :
         {"NETCDF:a.nc:v", "gtiff_dir:1:a.tif", "MEM:::DATAPOINTER=1,PIXELS=1,LINES=1"})
        CHECK_THAT(error_text([&] { (void)inspect({name}); }), Contains("begin with a format"));
    CHECK_THAT(error_text([] { (void)inspect({"<VRTDataset></VRTDataset>"}); }),
               Contains("this is text"));
    const TemporaryFolder folder;
    const auto pipe = folder.path() / "pipe.tif";
    REQUIRE(::mkfifo(pipe.c_str(), 0600) == 0);
    CHECK_THAT(error_text([&] { (void)inspect({pipe}); }), Contains("no regular file"));
    CHECK_THAT(error_text([&] { (void)inspect({folder.path() / "a\nb.tif"}); }),
               Contains("no such file"));
}

TEST_CASE("hostile header: sizes beyond all limits are refused at once", "[raster][edge]") {
    const TemporaryFolder folder;
    auto raster = ones();
    raster.options = {"TILED=YES", "BLOCKXSIZE=65536", "BLOCKYSIZE=65536", "SPARSE_OK=TRUE",
                      "BIGTIFF=YES"};
    raster.grid = square_grid(200000, 200000, 0, 640, 1);
    raster.bands.clear();
    CHECK_THAT(error_text([&] {
                   (void)inspect({make_empty_raster(folder.path() / "blocks.tif", raster)});
               }),
               Contains("blocks of 65536 x 65536 pixels decode to 4.3 GB") && Contains("--memory"));
    raster.grid = square_grid(2000000, 2000000, 0, 640, 1);
    CHECK_THAT(error_text([&] {
                   (void)inspect({make_empty_raster(folder.path() / "pixels.tif", raster)});
               }),
               Contains("it claims 2000000 x 2000000 pixels"));
}

TEST_CASE("cut files: refused, or every pixel is right", "[raster][edge]") {
    const TemporaryFolder folder;
    auto raster = ones();
    raster.bands = {[](int c, int r) { return static_cast<double>((c * 31 + r * 17) % 251); }};
    raster.options = {"TILED=YES", "BLOCKXSIZE=16", "BLOCKYSIZE=16", "COMPRESS=DEFLATE"};
    const auto whole = make_raster(folder.path() / "whole.tif", raster);
    const auto reference = read_all(spec_of(whole));
    const auto size = static_cast<long>(fs::file_size(whole));
    const auto cut = folder.path() / "cut.tif";
    int refused = 0;
    for (long bytes = 0; bytes < size; bytes += 1 + size / 80) {
        fs::copy_file(whole, cut, fs::copy_options::overwrite_existing);
        fs::resize_file(cut, static_cast<std::uintmax_t>(bytes));
        CAPTURE(bytes, size);
        Plane<float> pixels;
        const auto error = error_text([&] { pixels = read_all(spec_of(cut)); });
        if (error.empty())
            CHECK(same_bits(pixels, reference));
        else
            ++refused;
    }
    CHECK(refused > 60);
}

TEST_CASE("environment: variables of GDAL's do not reach the results", "[raster][edge]") {
    SUNBUDGET_NEEDS_DATA();
    const TemporaryFolder folder;
    const auto said = folder.path() / "said.txt";
    const auto self = fs::read_symlink("/proc/self/exe").native();
    // Half a pixel's shift, sidecars off, axes swapped, debug messages: each would fail one of these.
    const auto command =
        "GTIFF_POINT_GEO_IGNORE=TRUE GDAL_PAM_ENABLED=NO GDAL_DISABLE_READDIR_ON_OPEN=EMPTY_DIR "
        "OSR_DEFAULT_AXIS_MAPPING_STRATEGY=AUTHORITY_COMPLIANT CPL_DEBUG=ON CPL_LOG=" +
        (folder.path() / "log.txt").native() + " '" + self +
        "' 'inspect: reads class names*,inspect: Point files*,place_in*' > /dev/null 2> " +
        said.native();
    CHECK(std::system(command.c_str()) == 0);
    CHECK(fs::file_size(said) == 0);
    CHECK_FALSE(fs::exists(folder.path() / "log.txt"));
}

TEST_CASE("GdalMessages: keeps the first failure of its own scope, and nothing is printed",
          "[raster][edge]") {
    GdalMessages outer;
    {
        const GdalMessages inner;
        CPLError(CE_Warning, CPLE_AppDefined, "mind the %s", "gap");
        CPLError(CE_Warning, CPLE_AppDefined, "mind the %s", "gap");
        CPLError(CE_Failure, CPLE_AppDefined, "first");
        CPLError(CE_Failure, CPLE_AppDefined, "second");
        CHECK(inner.failures() == 2);
        CHECK(inner.first_failure() == "first");
        CHECK(inner.warnings() == std::vector<std::string>{"mind the gap"});
    }
    CHECK_FALSE(outer.failed());
}
