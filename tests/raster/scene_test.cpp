#include "sunbudget/raster/scene.hpp"

#include <algorithm>
#include <catch2/catch.hpp>
#include <fstream>
#include <vector>

#include "raster/input_support.hpp"
#include "sunbudget/tables/sensors.hpp"
#include "support/vectors.hpp"

using namespace sunbudget;
using namespace sunbudget::test;
using Catch::Matchers::Contains;

namespace {

const std::string level2 = "LC08_L2SP_005009_20150710_20200908_02_T2";
const std::string other = "LC08_L2SP_008059_20191201_20200825_02_T1";

class SceneFolder : public TemporaryFolder {
  public:
    explicit SceneFolder(const std::vector<std::string>& names) {
        for (const auto& name : names) std::ofstream(path() / name) << "x";
    }
    [[nodiscard]] std::string error() const {
        return error_text([&] { (void)scene_in(path()); });
    }
};

/// Everything that a profile reads: bands and quality.
std::vector<std::string> files_of(const Sensor& sensor) {
    std::vector<std::string> names;
    for (const auto& band : sensor.bands) names.push_back(band.product);
    for (const auto& test : sensor.tests)
        if (std::find(names.begin(), names.end(), test.raster) == names.end())
            names.push_back(test.raster);
    return names;
}

}  // namespace

TEST_CASE("scene_in: a real scene has every file of its profile", "[raster][vector]") {
    SUNBUDGET_NEEDS_DATA();
    const auto id =
        GENERATE(as<std::string>{}, level2, other, "LC08_L2SP_017036_20130419_20200913_02_T2");
    const auto scene = scene_in(*real_data("landsat_c2l2/" + id));
    CHECK(scene.id == id);
    const auto files = scene_files(scene, files_of(sensor("landsat-oli-c2")));
    CHECK(files.size() == 9);  // six bands, three quality rasters
    CHECK(files.at("SR_QA_AEROSOL").filename() == id + "_SR_QA_AEROSOL.TIF");
    CHECK(files.at("SR_B7").filename() == id + "_SR_B7.TIF");
}

TEST_CASE("scene_in: a Level-1 product beside the surface reflectance does not disturb",
          "[raster][edge]") {
    const SceneFolder folder({level2 + "_SR_B2.TIF", level2 + "_SR_B2.TIF.aux.xml",
                              level2 + "_MTL.txt",
                              "LC08_L1GT_005009_20150710_20200908_02_T2_B2.TIF", "town.tif"});
    const auto scene = scene_in(folder.path());
    CHECK(scene.id == level2);
    CHECK(scene.files.size() == 1);
}

TEST_CASE("scene_in: what is no single scene is refused with the reason", "[raster][edge]") {
    CHECK_THAT(SceneFolder({}).error(), Contains("no files of a known product"));
    CHECK_THAT(SceneFolder({"town.tif"}).error(), Contains("one by one"));
    CHECK_THAT(SceneFolder({"LC08_L1TP_195025_20130707_20170503_01_T1_B2.TIF"}).error(),
               Contains("Level-1"));
    CHECK_THAT(SceneFolder({level2 + "_SR_B2.TIF", other + "_SR_B2.TIF"}).error(),
               Contains(level2) && Contains(other));
    CHECK_THAT(SceneFolder({level2 + "_SR_B2.TIF", level2 + "_SR_B2_crop.tif"}).error(),
               Contains("two files of SR_B2"));
    CHECK_THAT(error_text([] { (void)scene_in("/no/such/folder"); }), Contains("no such folder"));
}

TEST_CASE("scene_files: all missing files are named at once", "[raster][edge]") {
    const SceneFolder folder({level2 + "_SR_B2.TIF", level2 + "_QA_PIXEL.TIF"});
    const auto scene = scene_in(folder.path());
    const std::vector<std::string> wanted{"SR_B2", "SR_B6", "SR_B7"};
    CHECK_THAT(error_text([&] { (void)scene_files(scene, wanted); }), Contains("SR_B6, SR_B7"));
}
