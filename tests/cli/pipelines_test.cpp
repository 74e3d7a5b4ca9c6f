// The plans in pipelines/, run on the demo town.
#include <catch2/catch.hpp>
#include <nlohmann/json.hpp>

#include "program.hpp"
#include "town.hpp"

using namespace sunbudget::test;
using Catch::Contains;
namespace fs = std::filesystem;

namespace {
const fs::path pipelines = source_folder() / "pipelines";

/// Every input's digest is a SHA-256 in full or a table's; the run is named by one of its own.
void check_run_json(const fs::path& file) {
    const auto json = nlohmann::json::parse(content(file));
    CHECK(json.at("run_digest").get<std::string>().size() == 64);
    REQUIRE_FALSE(json.at("inputs").empty());
    for (const auto& input : json.at("inputs")) {
        CAPTURE(input.dump());
        CHECK_THAT(input.at("digest").get<std::string>(), Catch::Matches("(sha256:)?[0-9a-f]{64}"));
    }
    for (const auto& layer : json.at("layers"))
        if (layer.contains("bands"))
            for (const auto& band : layer.at("bands"))
                CHECK(band.at("valid_pixels").get<long>() > 0);
}

void check_folder(const fs::path& folder) {
    const auto sums = shell("cd " + word(folder) + " && sha256sum -c SHA256SUMS");
    CAPTURE(sums.out, sums.err);
    CHECK(sums.exit_code == 0);
    check_run_json(folder / "run.json");
    // The public validator's warnings and errors, and GDAL's own complaints, of all files at one start.
    const auto verdict =
        shell("cd " + word(folder) +
              " && /usr/bin/python3 -c 'import glob\n"
              "from osgeo import gdal\n"
              "from osgeo_utils.samples.validate_cloud_optimized_geotiff import validate\n"
              "for f in sorted(glob.glob(\"*.tif\")): gdal.ErrorReset(); w, e, _ = validate(f); "
              "gdal.Info(f); print(f, w, e, gdal.GetLastErrorMsg() or \"silent\")' 2>&1");
    std::string expected;
    for (const auto& name : names_in(folder))
        if (name.ends_with(".tif")) expected += name + " [] [] silent\n";
    CHECK(verdict.out == expected);
}
}  // namespace

TEST_CASE("pipelines: every plan is checked and runs, and its folder is whole and valid",
          "[cli][pipelines]") {
    const auto town = demo_town();
    if (!town) {
        WARN("SKIPPED: the demo town needs python3-numpy and python3-gdal");
        return;
    }
    const TemporaryFolder folder;
    fs::create_directory_symlink(*town, folder.path() / "demo-town");
    int plans = 0;
    for (const auto& name : names_in(pipelines)) {
        if (!name.ends_with(".yaml")) continue;
        CAPTURE(name);
        ++plans;
        fs::copy_file(pipelines / name, folder.path() / name);
        const auto out = (folder.path() / (name + ".out")).string();
        // The middle of the town in a few directions: the same code in a twentieth of the time. A plan with a grid of
        // its own is coarse.
        std::vector<std::string> words{"check", (folder.path() / name).string()};
        const auto text = content(pipelines / name);
        if (text.find("elevation:") != std::string::npos)
            words.insert(words.end(), {"--set", "terrain.directions=16"});
        if (text.find("\ngrid:") == std::string::npos)
            words.insert(words.end(), {"--set", "grid.bounds=[448900, 5304000, 450100, 5305200]"});
        const auto checked = sunbudget::test::sunbudget(words);
        CAPTURE(checked.err);
        CHECK(checked.exit_code == 0);
        CHECK_THAT(checked.out, Contains("Layers\n") && Contains("Estimate"));
        words.front() = "run";
        words.insert(words.end(), {"--out", out});
        const auto ran = sunbudget::test::sunbudget(words);
        CAPTURE(ran.err);
        REQUIRE(ran.exit_code == 0);
        check_folder(out);
        fs::remove_all(out);
    }
    CHECK(plans >= 5);
}
