#include "sunbudget/raster/finish.hpp"

#include <gdal_priv.h>
#include <ogr_spatialref.h>
#include <sys/mount.h>
#include <unistd.h>

#include <catch2/catch.hpp>
#include <cmath>
#include <fstream>
#include <memory>

#include "layer_maker.hpp"
#include "sunbudget/base/digest.hpp"
#include "sunbudget/base/error.hpp"
#include "sunbudget/base/parallel.hpp"
#include "sunbudget/base/text.hpp"
#include "support/vectors.hpp"

using namespace sunbudget;
using namespace sunbudget::test;
namespace fs = std::filesystem;

namespace {
struct CloseDataset {
    void operator()(GDALDataset* dataset) const { GDALClose(dataset); }
};
using Dataset = std::unique_ptr<GDALDataset, CloseDataset>;

Dataset opened(const fs::path& file) {
    Dataset dataset(GDALDataset::Open(file.c_str(), GDAL_OF_RASTER));
    REQUIRE(dataset);
    return dataset;
}

std::string wkt_of(int epsg) {
    OGRSpatialReference reference;
    reference.importFromEPSG(epsg);
    char* wkt = nullptr;
    const char* options[] = {"FORMAT=WKT2_2019", nullptr};
    reference.exportToWkt(&wkt, options);
    std::string text = wkt;
    CPLFree(wkt);
    return text;
}

std::string item(GDALMajorObject& object, const char* key) {
    const char* value = object.GetMetadataItem(key);
    return value ? value : "(none)";
}

/// A complete spool of a small layer.
struct Prepared {
    LayerFile layer = invented_layer(600, 500, 128, 2, Sample::float32);
    TemporaryFolder folder;
    fs::path spool_file = folder.path() / "spool";
    fs::path file = folder.path() / "out.tif";
    Spool spool = Spool::create(spool_file, layout_of(layer));

    Prepared() {
        Pyramid pyramid(layer, spool);
        put_all(layer, pyramid, 0, 1);
    }
    [[nodiscard]] Cause cause_of_failure() const {
        try {
            finish_layer(layer, spool, {}, file);
        } catch (const Error& error) {
            return error.cause();
        }
        return Cause::internal;
    }
};
}  // namespace

TEST_CASE("finish_layer: position and CRS come back, rotated and geographic too",
          "[raster][differential]") {
    const auto [epsg, affine] =
        GENERATE(table<int, Affine>({{32633, {500000, 2, 0, 5600000, 0, -2}},
                                     {32633, {500000.5, 1.7, 0.9, 5600000.25, 0.9, -1.7}},
                                     {4326, {-77.1, 1.0 / 3600, 0, 38.9, 0, -1.0 / 3600}},
                                     {3413, {-1e6, 30, 0, -2e6, 0, -30}},
                                     {3857, {1.1e6, 10, 0, 6.2e6, 0, -10}},
                                     {2263, {980000, 3, 0, 200000, 0, -3}}}));
    CAPTURE(epsg);
    TemporaryFolder folder;
    auto layer = invented_layer(300, 200, 128, 2, Sample::float32);
    layer.grid.affine = affine;
    layer.grid.crs_wkt = wkt_of(epsg);
    const auto file = made(layer, folder.path());
    const auto dataset = opened(file);
    Affine found{};
    REQUIRE(dataset->GetGeoTransform(found.data()) == CE_None);
    for (std::size_t i = 0; i < 6; ++i) CHECK(found[i] == affine[i]);
    const auto* reference = dataset->GetSpatialRef();
    REQUIRE(reference != nullptr);
    CHECK(std::string(reference->GetAuthorityCode(nullptr)) == std::to_string(epsg));
    CHECK(same_pixels(read_level(file, 1, 1), reference_levels(layer, 1)[1]));
    CHECK_FALSE(fs::exists(file.string() + ".aux.xml"));
}

TEST_CASE("finish_layer: the file says what is known about it", "[raster]") {
    TemporaryFolder folder;
    const auto layer = invented_layer(300, 200, 128, 2, Sample::float32);
    const auto dataset = opened(made(layer, folder.path()));
    CHECK(item(*dataset, "PLAN_DIGEST") == "sha256:0123");
    CHECK(item(*dataset, "METHOD") == "a <b> & \"c\"");
    CHECK(item(*dataset, "AREA_OR_POINT") == "Area");
    CHECK(std::string(dataset->GetMetadataItem("INTERLEAVE", "IMAGE_STRUCTURE")) == "BAND");
    CHECK(std::string(dataset->GetMetadataItem("COMPRESSION", "IMAGE_STRUCTURE")) == "ZSTD");
    const auto statistics = statistics_of(layer);
    for (int b = 1; b <= 2; ++b) {
        auto& band = *dataset->GetRasterBand(b);
        const auto& figures = statistics[static_cast<std::size_t>(b) - 1];
        CHECK(std::string(band.GetDescription()) == "2025-" + std::to_string(b));
        CHECK(std::string(band.GetUnitType()) == "W/m2");
        CHECK(item(band, "PERIOD_HOURS") == "744");
        CHECK(std::isnan(band.GetNoDataValue()));
        CHECK(item(band, "STATISTICS_MEAN") == shortest(figures.mean));
        double min = 0, max = 0, mean = 0, stddev = 0;
        REQUIRE(band.GetStatistics(FALSE, FALSE, &min, &max, &mean, &stddev) == CE_None);
        CHECK(min == figures.min);
        CHECK(max == figures.max);
        CHECK(mean == figures.mean);
        CHECK(stddev == figures.stddev);
        const double percent =
            100 * static_cast<double>(figures.count) / static_cast<double>(figures.pixels);
        CHECK(parse_number(item(band, "STATISTICS_VALID_PERCENT")).value() ==
              Approx(percent).margin(0.01));  // stated with two decimals
        REQUIRE(band.GetOverviewCount() == 2);
        CHECK(std::isnan(band.GetOverview(0)->GetNoDataValue()));
    }
}

TEST_CASE("finish_layer: what GDAL computes from the pixels is what the file states",
          "[raster][differential]") {
    TemporaryFolder folder;
    const auto layer = invented_layer(1000, 1300, 256, 1, Sample::float32);
    const auto dataset = opened(made(layer, folder.path()));
    double min = 0, max = 0, mean = 0, stddev = 0;
    auto& band = *dataset->GetRasterBand(1);
    REQUIRE(band.ComputeStatistics(FALSE, &min, &max, &mean, &stddev, nullptr, nullptr) == CE_None);
    const auto figures = statistics_of(layer)[0];
    CHECK(figures.min == min);
    CHECK(figures.max == max);
    // GDAL updates mean and spread pixel by pixel: 1.3 million roundings of 1e-16.
    CHECK(figures.mean == Approx(mean).epsilon(1e-10));
    CHECK(figures.stddev == Approx(stddev).epsilon(1e-10));
}

TEST_CASE("finish_layer: flags have no nodata unless one is given", "[raster]") {
    TemporaryFolder folder;
    auto layer = invented_layer(100, 100, 128, 1, Sample::uint16);
    int has = 1;
    opened(made(layer, folder.path() / "without"))->GetRasterBand(1)->GetNoDataValue(&has);
    CHECK(has == 0);
    layer.nodata = 65535;
    const auto with = opened(made(layer, folder.path() / "with"));
    CHECK(with->GetRasterBand(1)->GetNoDataValue(&has) == 65535);
    CHECK(has == 1);
}

TEST_CASE("finish_layer: a band without a valid pixel states so", "[raster][edge]") {
    TemporaryFolder folder;
    auto layer = invented_layer(100, 100, 128, 1, Sample::float32);
    auto spool = Spool::create(folder.path() / "spool", layout_of(layer));
    Pyramid pyramid(layer, spool);
    pyramid.put(0, 0, 0, Plane<float>(128, 128, std::nanf("")));
    const std::vector<BandStatistics> none{{0, 10000, 0, 0, 0, 0}};
    finish_layer(layer, spool, none, folder.path() / "out.tif");
    const auto dataset = opened(folder.path() / "out.tif");
    CHECK(item(*dataset->GetRasterBand(1), "STATISTICS_VALID_PERCENT") == "0");
    CHECK(item(*dataset->GetRasterBand(1), "STATISTICS_MEAN") == "(none)");
}

TEST_CASE("finish_layer: a large file becomes a BigTIFF with the same pixels", "[raster]") {
    Prepared p;
    finish_layer(p.layer, p.spool, {}, p.file);
    const auto big = p.folder.path() / "big.tif";
    finish_layer(p.layer, p.spool, {}, big, 1000);
    const auto version = [](const fs::path& file) {
        std::ifstream stream(file, std::ios::binary);
        stream.seekg(2);
        return stream.get();
    };
    CHECK(version(p.file) == 42);
    CHECK(version(big) == 43);
    for (int level = 0; level < 3; ++level)
        CHECK(same_pixels(read_level(big, 1, level),
                          reference_levels(p.layer, 1)[static_cast<std::size_t>(level)]));
    CHECK(validated(big).first);
}

TEST_CASE("finish_layer: missing tiles are not made up", "[raster][edge]") {
    TemporaryFolder folder;
    const auto layer = invented_layer(600, 500, 128, 1, Sample::float32);
    auto spool = Spool::create(folder.path() / "spool", layout_of(layer));
    Pyramid pyramid(layer, spool);
    put_some(layer, pyramid, 1, 0, 19);
    CHECK_THROWS_WITH(finish_layer(layer, spool, {}, folder.path() / "out.tif"),
                      Catch::Contains("of 29 tiles are missing"));
    CHECK_FALSE(fs::exists(folder.path() / "out.tif"));
}

TEST_CASE("finish_layer: a damaged tile in the spool leaves no file", "[raster][edge]") {
    Prepared p;
    flip_byte(p.spool_file, fs::file_size(p.spool_file) / 2);
    CHECK(p.cause_of_failure() == Cause::output);
    CHECK_FALSE(fs::exists(p.file));
}

TEST_CASE("verify_layer: any damaged byte among the tiles of the file is noticed",
          "[raster][edge]") {
    Prepared p;
    finish_layer(p.layer, p.spool, {}, p.file);
    CHECK_NOTHROW(verify_layer(p.spool, p.file));
    const auto size = fs::file_size(p.file);
    for (std::uint64_t i = 1; i < 20; ++i) {
        const auto at = size - size * i / 25;  // the tail: directories are far smaller than a fifth
        CAPTURE(at);
        flip_byte(p.file, at);
        CHECK_THROWS_AS(verify_layer(p.spool, p.file), Error);
        flip_byte(p.file, at);
    }
    CHECK_NOTHROW(verify_layer(p.spool, p.file));
    fs::resize_file(p.file, size - 1);
    CHECK_THROWS_AS(verify_layer(p.spool, p.file), Error);
    fs::resize_file(p.file, 20);
    CHECK_THROWS_AS(verify_layer(p.spool, p.file), Error);
}

TEST_CASE("finish_layer: whatever stands at the output's name is left alone", "[raster][edge]") {
    Prepared p;
    const auto victim = p.folder.path() / "victim";
    std::ofstream(victim) << "precious";
    SECTION("a file") {
        fs::copy_file(victim, p.file);
    }
    SECTION("a link") {
        fs::create_symlink(victim, p.file);
    }
    SECTION("a link to nothing") {
        fs::create_symlink(p.folder.path() / "nothing", p.file);
    }
    SECTION("a folder") {
        fs::create_directory(p.file);
    }
    const auto before = fs::symlink_status(p.file).type();
    CHECK(p.cause_of_failure() == Cause::output);
    CHECK(fs::symlink_status(p.file).type() == before);
    CHECK(sha256_of_file(victim) == sha256_of("precious"));
    CHECK_FALSE(fs::exists(p.folder.path() / "nothing"));
}

TEST_CASE("finish_layer: a stop signal ends it without a file", "[raster][edge]") {
    Prepared p;
    stop_signal = 15;
    const auto cause = p.cause_of_failure();
    stop_signal = 0;
    CHECK(cause == Cause::temporary);
    CHECK_FALSE(fs::exists(p.file));
}

TEST_CASE("check_layer: refuses a CRS that a GeoTIFF cannot hold, and none", "[raster][edge]") {
    auto layer = invented_layer(100, 100, 128, 1, Sample::float32);
    CHECK_NOTHROW(check_layer(layer));
    layer.grid.crs_wkt = wkt_of(8857);  // Equal Earth: no GeoTIFF method, GDAL 3.6 keeps it aside
    CHECK_THROWS_WITH(check_layer(layer), Catch::Contains("cannot be written into a GeoTIFF"));
    layer.grid.crs_wkt = "nonsense";
    CHECK_THROWS_AS(check_layer(layer), Error);
}

namespace {
/// A disk of its own, of that size. Needs the right to mount.
class SmallDisk {
  public:
    explicit SmallDisk(long bytes) {
        const auto size = "size=" + std::to_string(bytes);
        mounted_ = mount("tmpfs", folder_.path().c_str(), "tmpfs", 0, size.c_str()) == 0;
    }
    ~SmallDisk() {
        if (mounted_) umount(folder_.path().c_str());
    }
    SmallDisk(const SmallDisk&) = delete;
    SmallDisk& operator=(const SmallDisk&) = delete;
    [[nodiscard]] bool mounted() const { return mounted_; }
    [[nodiscard]] const fs::path& path() const { return folder_.path(); }

  private:
    TemporaryFolder folder_;
    bool mounted_ = false;
};
}  // namespace

TEST_CASE("finish_layer: a full disk is an output error with the bytes free, and no file is left",
          "[raster][edge]") {
    Prepared p;
    finish_layer(p.layer, p.spool, {}, p.file);
    const auto size = static_cast<long>(fs::file_size(p.file));
    for (int step = 0; step < 20; ++step) {
        // tmpfs counts in pages of 4096 bytes; the last step is one page short.
        const long room = std::max(4096L, (size * step / 20 + 4095) / 4096 * 4096 - 4096);
        const SmallDisk disk(room);
        if (!disk.mounted()) {
            WARN("SKIPPED: a small disk cannot be mounted here (not root)");
            return;
        }
        CAPTURE(room, size);
        const auto file = disk.path() / "out.tif";
        CHECK_THROWS_WITH(finish_layer(p.layer, p.spool, {}, file),
                          Catch::Contains("No space left") && Catch::Contains("free there") &&
                              Catch::Contains(file.string()));
        CHECK(fs::is_empty(disk.path()));
    }
}

TEST_CASE("Spool: a full disk is an output error with the bytes free", "[raster][edge]") {
    const SmallDisk disk(64 * 1024);
    if (!disk.mounted()) {
        WARN("SKIPPED: a small disk cannot be mounted here (not root)");
        return;
    }
    const auto layer = invented_layer(600, 500, 128, 2, Sample::float32);
    auto spool = Spool::create(disk.path() / "spool", layout_of(layer));
    Pyramid pyramid(layer, spool);
    CHECK_THROWS_WITH(put_all(layer, pyramid, 0, 2),
                      Catch::Contains("No space left") && Catch::Contains("free there"));
}
