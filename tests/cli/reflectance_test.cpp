#include <array>
#include <catch2/catch.hpp>
#include <cmath>
#include <fstream>
#include <iterator>
#include <map>
#include <nlohmann/json.hpp>
#include <optional>

#include "program.hpp"
#include "reference/broadband.hpp"
#include "support/vectors.hpp"

using namespace sunbudget::test;
using Catch::Matchers::Contains;
using Json = nlohmann::json;

namespace {

namespace fs = std::filesystem;

const std::string greenland = "LC08_L2SP_005009_20150710_20200908_02_T2";
const std::string colombia = "LC08_L2SP_008059_20191201_20200825_02_T1";
const std::string cloudy = "LC08_L2SP_017036_20130419_20200913_02_T2";

// Liang 2001 (references: albedo_ntb-001 to 006), blue red nir swir1 swir2.
const std::array<double, 5> weights{0.356, 0.130, 0.373, 0.085, 0.072};
constexpr double constant = -0.0018;
const std::array<int, 5> oli_bands{2, 4, 5, 6, 7};
// Stored values are multiples of 2^-13; float arithmetic on five bands stays far below 1e-6.
constexpr double half_quantum = 0.5 / 8192 + 1e-6;

/// A band's numbers as GDAL's own tools read them.
std::vector<double> pixels(const fs::path& file, int band = 1) {
    const TemporaryFolder folder;
    const auto raw = folder.path() / "raw";
    const auto done = shell("gdal_translate -q -of ENVI -ot Float64 -b " + std::to_string(band) +
                            " '" + file.string() + "' '" + raw.string() + "'");
    REQUIRE(done.exit_code == 0);
    const auto bytes = content(raw);
    std::vector<double> values(bytes.size() / sizeof(double));
    std::copy_n(bytes.data(), bytes.size(), reinterpret_cast<char*>(values.data()));
    return values;
}

std::string scene_folder(const std::string& id) {
    return real_data("landsat_c2l2/" + id)->string();
}
std::string scene_file(const std::string& id, const std::string& band) {
    return scene_folder(id) + "/" + id + "_" + band + ".TIF";
}

/// A run of a plan in a folder of its own.
class Ran {
  public:
    explicit Ran(const std::string& surface, const std::string& layers = "[albedo, quality]",
                 const std::string& more = {}) {
        plan_ = folder_.path() / "plan.yaml";
        write(plan_, "sunbudget: 1\nsurface:\n" + surface + more +
                         "outputs: {directory: out, layers: " + layers + "}\n");
        outcome = sunbudget::test::sunbudget({"run", plan_.string()});
    }
    [[nodiscard]] fs::path file(const std::string& name) const {
        return folder_.path() / "out" / name;
    }
    [[nodiscard]] Json report() const { return Json::parse(content(file("run.json"))); }
    [[nodiscard]] const fs::path& plan() const { return plan_; }

    Outcome outcome;

  private:
    TemporaryFolder folder_;
    fs::path plan_;
};

std::string scene_surface(const std::string& id, const std::string& more = {}) {
    return "  reflectance: {sensor: landsat-oli-c2, scene: \"" + scene_folder(id) + "\"" + more +
           "}\n";
}

/// The numbers of a scene, and what they come to in plain double arithmetic.
struct RealScene {
    std::array<std::vector<double>, 5> bands;
    std::vector<double> qa, radsat, aerosol;

    explicit RealScene(const std::string& id) {
        for (std::size_t b = 0; b < 5; ++b)
            bands[b] = pixels(scene_file(id, "SR_B" + std::to_string(oli_bands[b])));
        qa = pixels(scene_file(id, "QA_PIXEL"));
        radsat = pixels(scene_file(id, "QA_RADSAT"));
        aerosol = pixels(scene_file(id, "SR_QA_AEROSOL"));
    }
    /// NaN where a band has no data.
    [[nodiscard]] double albedo(std::size_t i) const {
        std::array<double, 5> r{};
        for (std::size_t b = 0; b < 5; ++b) {
            if (bands[b][i] == 0) return std::nan("");
            r[b] = bands[b][i] * 2.75e-5 - 0.2;
        }
        return broadband_reference(weights, r, constant);
    }
    /// Names of the quality tests that hold, in the order of the quality layer.
    [[nodiscard]] std::vector<std::string> seen(std::size_t i) const {
        const auto bit = [&](const std::vector<double>& codes, int n) {
            return (static_cast<unsigned>(codes[i]) >> static_cast<unsigned>(n) & 1u) != 0;
        };
        std::vector<std::string> names;
        if (bit(qa, 3)) names.emplace_back("cloud");
        if (bit(qa, 1)) names.emplace_back("dilated_cloud");
        if (bit(qa, 2)) names.emplace_back("cirrus");
        if (bit(qa, 4)) names.emplace_back("cloud_shadow");
        if (bit(qa, 5)) names.emplace_back("snow");
        bool saturated = false;
        for (const int band : oli_bands) saturated = saturated || bit(radsat, band - 1);
        if (saturated) names.emplace_back("saturated");
        if (bit(aerosol, 6) && bit(aerosol, 7)) names.emplace_back("high_aerosol");
        return names;
    }
    [[nodiscard]] bool fill(std::size_t i) const {
        return (static_cast<unsigned>(qa[i]) & 1u) != 0;
    }
};

const std::map<std::string, unsigned> flag_of{{"cloud", 1u << 3},       {"dilated_cloud", 1u << 4},
                                              {"cirrus", 1u << 5},      {"cloud_shadow", 1u << 6},
                                              {"snow", 1u << 7},        {"saturated", 1u << 8},
                                              {"high_aerosol", 1u << 9}};

struct Reckoned {
    std::map<std::string, std::uint64_t> unused;  ///< by reason, each pixel once
    std::uint64_t wrong_albedo = 0, wrong_quality = 0, used = 0;
    double sum = 0;
};

/// Holds a run's albedo and quality against plain arithmetic; `fill_albedo` where the image is not used.
Reckoned compare(const RealScene& scene, const Ran& ran, const std::vector<std::string>& reject,
                 std::optional<double> fill_albedo = {}) {
    const auto albedo = pixels(ran.file("albedo.tif")), flags = pixels(ran.file("quality.tif"));
    REQUIRE(albedo.size() == scene.qa.size());
    Reckoned result;
    for (std::size_t i = 0; i < albedo.size(); ++i) {
        const auto names = scene.seen(i);
        unsigned quality = 0;
        for (const auto& name : names) quality |= flag_of.at(name);
        const auto first = std::find_if(names.begin(), names.end(), [&](const auto& name) {
            return std::find(reject.begin(), reject.end(), name) != reject.end();
        });
        // 0.03: the error of the fit on OLI, as the sensors' table has it.
        auto [expected, changed] = keep_reference(
            scene.fill(i) || first != names.end() ? std::nan("") : scene.albedo(i), 0.03);
        if (changed) quality |= 1u << 10;
        if (std::isnan(expected)) {
            ++result.unused[first != names.end() ? *first : changed ? "out_of_range" : "no_data"];
            if (fill_albedo) {
                expected = *fill_albedo;
                quality |= 5;
            }
        } else {
            quality |= 4;
            ++result.used;
            result.sum += expected;
        }
        const bool same = std::isnan(expected) ? std::isnan(albedo[i])
                                               : std::abs(albedo[i] - expected) <= half_quantum;
        result.wrong_albedo += !same;
        result.wrong_quality += static_cast<unsigned>(flags[i]) != quality;
    }
    return result;
}

const std::vector<std::string> usual_reject{"cloud", "dilated_cloud", "cirrus", "cloud_shadow",
                                            "saturated"};

void check_counts(const Ran& ran, const Reckoned& reckoned) {
    const auto unused =
        ran.report()["image"]["unused_pixels"].get<std::map<std::string, std::uint64_t>>();
    CHECK(unused == reckoned.unused);
}

std::string bands_of(const std::string& id) {
    return "blue: \"" + scene_file(id, "SR_B2") + "\", red: \"" + scene_file(id, "SR_B4") +
           "\", nir: \"" + scene_file(id, "SR_B5") + "\", swir1: \"" + scene_file(id, "SR_B6") +
           "\", swir2: \"" + scene_file(id, "SR_B7") + "\"";
}

}  // namespace

TEST_CASE("reflectance: each scene's albedo, flags and counts are those of plain arithmetic",
          "[cli][differential]") {
    SUNBUDGET_NEEDS_DATA();
    const auto id = GENERATE(as<std::string>{}, greenland, colombia, cloudy);
    CAPTURE(id);
    const Ran ran(scene_surface(id));
    INFO(ran.outcome.err);
    REQUIRE(ran.outcome.exit_code == 0);
    const auto reckoned = compare(RealScene(id), ran, usual_reject);
    CHECK(reckoned.wrong_albedo == 0);
    CHECK(reckoned.wrong_quality == 0);
    check_counts(ran, reckoned);
    const auto image = ran.report()["image"];
    CHECK(image["scene"] == id);
    CHECK(image["fit_error"] == 0.03);
    CHECK_THAT(image["weights_note"].get<std::string>(), Contains("common practice"));
    const auto info = shell("gdalinfo '" + ran.file("albedo.tif").string() + "'").out;
    CHECK_THAT(info, Contains("scene=" + id) &&
                         Contains("acquired=" + image["acquired"].get<std::string>()) &&
                         Contains("albedo_fit_error=0.03") && Contains("Liang"));
}

TEST_CASE("reflectance: bright ice flagged as cloud is kept when the plan does not reject cloud",
          "[cli][differential]") {
    SUNBUDGET_NEEDS_DATA();
    const RealScene scene(greenland);
    const Ran strict(scene_surface(greenland, ", reject: [cloud, snow]"));
    const Ran open(scene_surface(greenland, ", reject: []"));
    REQUIRE(strict.outcome.exit_code == 0);
    REQUIRE(open.outcome.exit_code == 0);
    const auto with = compare(scene, strict, {"cloud", "snow"}), without = compare(scene, open, {});
    for (const auto* reckoned : {&with, &without}) {
        CHECK(reckoned->wrong_albedo == 0);
        CHECK(reckoned->wrong_quality == 0);
    }
    check_counts(strict, with);
    check_counts(open, without);
    CHECK(without.used > with.used + 50000);
    CHECK(without.unused.count("cloud") == 0);
}

TEST_CASE("reflectance: a scene under cloud comes out nearly empty and says so", "[cli][vector]") {
    SUNBUDGET_NEEDS_DATA();
    const Ran ran(scene_surface(cloudy), "[albedo]");
    CHECK(ran.outcome.exit_code == 0);
    CHECK_THAT(ran.outcome.err,
               Contains("warning: the result is nearly empty: ") && Contains("cloud "));
    CHECK_THAT(ran.report()["warnings"].dump(), Contains("nearly empty"));
    const Ran land(scene_surface(colombia), "[albedo]");
    CHECK_THAT(land.outcome.err, !Contains("nearly empty"));
}

TEST_CASE(
    "reflectance: bands by name, by flags and by a saved plan give the same bytes as one another",
    "[cli][differential]") {
    SUNBUDGET_NEEDS_DATA();
    const TemporaryFolder folder;
    const auto out = (folder.path() / "one.tif").string(),
               plan = (folder.path() / "below" / "saved.yaml").string();
    fs::create_directories(folder.path() / "below");
    const std::string flags =
        "blue=" + scene_file(colombia, "SR_B2") + ",red=" + scene_file(colombia, "SR_B4") +
        ",nir=" + scene_file(colombia, "SR_B5") + ",swir1=" + scene_file(colombia, "SR_B6") +
        ",swir2=" + scene_file(colombia, "SR_B7");
    const auto job = sunbudget::test::sunbudget(
        {"albedo", "--sensor", "landsat-oli-c2", "--bands", flags, "--quality",
         scene_file(colombia, "QA_PIXEL"), "-o", out, "--save-plan", plan});
    INFO(job.err);
    REQUIRE(job.exit_code == 0);
    const auto run =
        sunbudget::test::sunbudget({"run", plan, "--out", (folder.path() / "whole").string()});
    INFO(run.err);
    REQUIRE(run.exit_code == 0);
    CHECK(content(out) == content(folder.path() / "whole" / "albedo.tif"));

    // Saturation and aerosol are not named here.
    const Ran ran("  reflectance: {sensor: landsat-oli-c2, bands: {" + bands_of(colombia) +
                  "}, quality: \"" + scene_file(colombia, "QA_PIXEL") + "\"}\n");
    REQUIRE(ran.outcome.exit_code == 0);
    CHECK(pixels(ran.file("albedo.tif")).size() == pixels(out).size());
    const auto a = pixels(ran.file("albedo.tif")), b = pixels(out);
    CHECK(std::equal(a.begin(), a.end(), b.begin(), [](double x, double y) {
        return x == y || (std::isnan(x) && std::isnan(y));
    }));
}

TEST_CASE("save-plan: insolation and net give the same bytes from their saved plans",
          "[cli][differential]") {
    const TemporaryFolder folder;
    const auto at = [&](const std::string& name) { return (folder.path() / name).string(); };
    REQUIRE(shell("gdal_create -q -of GTiff -ot Byte -burn 10 -outsize 60 50 -a_srs EPSG:32633 "
                  "-a_ullr 500000 5600000 500600 5599500 " +
                  at("cover.tif"))
                .exit_code == 0);
    fs::create_directories(at("plans"));
    const std::vector<std::string> time{"--from",   "2025-06-01", "--to",   "2025-06-03",
                                        "--totals", "day",        "--unit", "kWh/m2"};
    const auto same = [&](std::vector<std::string> words, const std::string& layer) {
        words.insert(words.end(), time.begin(), time.end());
        for (const auto& word : {std::string("-o"), at("job.tif"), std::string("--save-plan"),
                                 at("plans/" + layer + ".yaml")})
            words.push_back(word);
        const auto job = sunbudget::test::sunbudget(words, {folder.path().string(), {}});
        INFO(job.err);
        REQUIRE(job.exit_code == 0);
        const auto run = sunbudget::test::sunbudget(
            {"run", at("plans/" + layer + ".yaml"), "--out", at("out-" + layer)});
        INFO(run.err);
        REQUIRE(run.exit_code == 0);
        CHECK(content(at("job.tif")) == content(at("out-" + layer + "/" + layer + ".tif")));
    };
    same({"net", "--cover", "cover.tif", "--classes", "worldcover"}, "net_shortwave");
    same({"insolation", "--like", "cover.tif", "--elevation", "250 m"}, "insolation");
}

TEST_CASE(
    "reflectance: Level-1 and raw numbers are refused as surface reflectance, with the reason",
    "[cli][vector]") {
    SUNBUDGET_NEEDS_DATA();
    const auto refused = [](const std::string& reflectance) {
        const Ran ran("  reflectance: {" + reflectance + "}\n", "[albedo]");
        CHECK(ran.outcome.exit_code != 0);
        CHECK_FALSE(fs::exists(ran.file("albedo.tif")));
        return ran.outcome.err;
    };
    const auto zion = [](int n) {
        return "\"" + real_data("zion_utah/landsat_b" + std::to_string(n) + ".tif")->string() +
               "\"";
    };
    const auto zion_bands = "bands: {blue: " + zion(2) + ", green: " + zion(3) +
                            ", red: " + zion(4) + ", nir: " + zion(5) + "}";
    CHECK_THAT(refused("sensor: landsat-oli-c2, " + zion_bands),
               Contains("liang2001 needs the bands swir1, swir2 too") &&
                   Contains("nothing says that this is surface reflectance"));
    // Declared all the same, the values give it away.
    CHECK_THAT(
        refused("sensor: generic, product: surface-reflectance, scale: 2.75e-5, offset: -0.2, "
                "weights: {blue: 0.4, red: 0.2, nir: 0.4}, " +
                zion_bands),
        Contains("unlike surface reflectance") && Contains("haze") &&
            Contains("implausible: allow"));

    const auto marburg = [](int n) {
        return "\"" +
               real_data("marburg_landsat_l1/LC08_L1TP_195025_20130707_20170503_01_T1_B" +
                         std::to_string(n) + ".TIF")
                   ->string() +
               "\"";
    };
    const auto marburg_bands = "sensor: landsat-oli-c2, bands: {blue: " + marburg(2) +
                               ", red: " + marburg(4) + ", nir: " + marburg(5) +
                               ", swir1: " + marburg(6) + ", swir2: " + marburg(7) + "}";
    CHECK_THAT(refused(marburg_bands),
               Contains("not corrected for the atmosphere") && Contains("Level-2 product"));
    CHECK_THAT(refused(marburg_bands + ", product: surface-reflectance, implausible: allow"),
               Contains("declared surface-reflectance, but it is a Level-1 product"));
    CHECK_THAT(refused("sensor: landsat-oli-c2, scene: \"" +
                       real_data("marburg_landsat_l1")->string() + "\""),
               Contains("no surface reflectance"));

    const auto olinda = real_data("olinda_brazil/L7_ETMs.tif")->string();
    const auto olinda_bands = "bands: {blue: \"" + olinda + ":1\", red: \"" + olinda +
                              ":3\", nir: \"" + olinda +
                              ":4\"}, weights: {blue: 0.4, red: 0.2, nir: 0.4}, sensor: generic";
    CHECK_THAT(refused(olinda_bands), Contains("nothing says that this is surface reflectance"));
    CHECK_THAT(refused(olinda_bands + ", product: surface-reflectance"),
               Contains("the scale looks wrong"));
    CHECK_THAT(refused(olinda_bands + ", product: top-of-atmosphere"),
               Contains("declared top-of-atmosphere"));
}

TEST_CASE(
    "reflectance: four bands of one file with weights of one's own; the faulty year is stopped, or "
    "warned of",
    "[cli][vector]") {
    SUNBUDGET_NEEDS_DATA();
    const auto surface = [](const std::string& year, const std::string& more) {
        const auto file = real_data("costarica_landsat5_sr/L5TSR_" + year + ".tif")->string();
        return "  reflectance: {sensor: generic, product: surface-reflectance, scale: 0.0001, "
               "bands: {blue: \"" +
               file + ":1\", green: \"" + file + ":2\", red: \"" + file + ":3\", nir: \"" + file +
               ":4\"}, weights: {blue: 0.3, red: 0.25, nir: 0.4, constant: 0.01}" + more + "}\n";
    };
    const Ran good(surface("2001", ""));
    INFO(good.outcome.err);
    REQUIRE(good.outcome.exit_code == 0);
    CHECK_THAT(good.report()["assumptions"].dump(),
               Contains("bands.green") && Contains("left alone"));
    const auto file = *real_data("costarica_landsat5_sr/L5TSR_2001.tif");
    const auto blue = pixels(file, 1), red = pixels(file, 3), nir = pixels(file, 4),
               albedo = pixels(good.file("albedo.tif"));
    std::uint64_t wrong = 0;
    for (std::size_t i = 0; i < albedo.size(); ++i) {
        const bool has_data = blue[i] != -32768 && red[i] != -32768 && nir[i] != -32768;
        const double sum = 0.01 + 1e-4 * (0.3 * blue[i] + 0.25 * red[i] + 0.4 * nir[i]);
        const auto expected = keep_reference(has_data ? sum : std::nan(""), 0.03).albedo;
        wrong += std::isnan(expected) ? !std::isnan(albedo[i])
                                      : !(std::abs(albedo[i] - expected) <= half_quantum);
    }
    CHECK(wrong == 0);

    const Ran stopped(surface("1986", ""));
    CHECK(stopped.outcome.exit_code == 3);
    CHECK_THAT(stopped.outcome.err,
               Contains("unlike surface reflectance") && Contains("implausible: allow"));
    const Ran allowed(surface("1986", ", implausible: allow"));
    CHECK(allowed.outcome.exit_code == 0);
    CHECK_THAT(allowed.outcome.err,
               Contains("warning: surface.reflectance: implausible, but allowed"));
    CHECK_THAT(allowed.report()["warnings"].dump(), Contains("implausible, but allowed"));
}

TEST_CASE(
    "reflectance: scale and offset in the file win over the sensor's, are said, and count once",
    "[cli][differential]") {
    SUNBUDGET_NEEDS_DATA();
    const TemporaryFolder folder;
    // Half the reflectance: the file's own words, against those of the product.
    std::string bands;
    const std::array<const char*, 5> names{"blue", "red", "nir", "swir1", "swir2"};
    for (std::size_t b = 0; b < 5; ++b) {
        const auto band = "SR_B" + std::to_string(oli_bands[b]);
        const auto file = folder.path() / (colombia + "_" + band + ".TIF");
        REQUIRE(shell("gdal_translate -q -a_scale 1.375e-5 -a_offset -0.1 '" +
                      scene_file(colombia, band) + "' '" + file.string() + "'")
                    .exit_code == 0);
        bands += std::string(b == 0 ? "" : ", ") + names[b] + ": \"" + file.string() + "\"";
    }
    const Ran ran("  reflectance: {sensor: landsat-oli-c2, reject: [], bands: {" + bands + "}}\n",
                  "[albedo]");
    INFO(ran.outcome.err);
    REQUIRE(ran.outcome.exit_code == 0);
    CHECK_THAT(ran.outcome.err, Contains("the file says scale 1.375e-05, offset -0.1") &&
                                    Contains("the file's is used"));
    const RealScene scene(colombia);
    const auto albedo = pixels(ran.file("albedo.tif"));
    std::uint64_t wrong = 0;
    for (std::size_t i = 0; i < albedo.size(); ++i) {
        const double half = (scene.albedo(i) - constant) / 2 + constant;
        const auto expected = keep_reference(half, 0.03).albedo;
        wrong += std::isnan(expected) ? !std::isnan(albedo[i])
                                      : !(std::abs(albedo[i] - expected) <= half_quantum);
    }
    CHECK(wrong == 0);
}

TEST_CASE("reflectance: rejected pixels are filled from the land cover where the plan says so",
          "[cli][differential]") {
    SUNBUDGET_NEEDS_DATA();
    const TemporaryFolder folder;
    const auto cover = (folder.path() / "cover.tif").string();
    REQUIRE(shell("gdal_create -q -if '" + scene_file(colombia, "SR_B2") +
                  "' -of GTiff -ot Byte -bands 1 -burn 1 '" + cover + "'")
                .exit_code == 0);
    const auto table = (folder.path() / "classes.csv").string();
    write(table,
          "code,name,kind,scale,albedo,albedo_low,albedo_high,emissivity,source\n1,forest,tree,"
          "facet,0.125,"
          "0.10,0.15,0.98,made for this test\n");
    const Ran ran("  cover: {raster: \"" + cover + "\", classes: \"" + table + "\"}\n" +
                  scene_surface(colombia, ", fill: cover"));
    INFO(ran.outcome.err);
    REQUIRE(ran.outcome.exit_code == 0);
    const auto reckoned = compare(RealScene(colombia), ran, usual_reject, 0.125);
    CHECK(reckoned.wrong_albedo == 0);
    CHECK(reckoned.wrong_quality == 0);
    check_counts(ran, reckoned);
    CHECK(ran.report()["quality_pixels"]["filled"].get<std::uint64_t>() + reckoned.used ==
          512u * 512u);
}

TEST_CASE("reflectance: files of two scenes, wrong roles and wrong quality rasters are refused",
          "[cli][edge]") {
    SUNBUDGET_NEEDS_DATA();
    const auto error = [](const std::string& more) {
        return Ran("  reflectance: {sensor: landsat-oli-c2, " + more + "}\n", "[albedo]")
            .outcome.err;
    };
    CHECK_THAT(error("bands: {" + bands_of(colombia) + "}, quality: \"" +
                     scene_file(greenland, "QA_PIXEL") + "\""),
               Contains("quality of the scene " + greenland));
    CHECK_THAT(error("bands: {" + bands_of(colombia) + "}, quality: \"" +
                     scene_file(colombia, "QA_RADSAT") + "\""),
               Contains("this is QA_RADSAT, not QA_PIXEL"));
    auto mixed = bands_of(colombia);
    mixed.replace(mixed.find("_SR_B4"), 6, "_SR_B3");
    CHECK_THAT(error("bands: {" + mixed + "}"), Contains("this is SR_B3, the band green"));
}

TEST_CASE("check: says of each band its product, scale, alignment, coverage and values",
          "[cli][vector]") {
    SUNBUDGET_NEEDS_DATA();
    const TemporaryFolder folder;
    const auto plan = folder.path() / "plan.yaml";
    write(plan,
          "sunbudget: 1\nsurface:\n" + scene_surface(colombia) + "outputs: {layers: [albedo]}\n");
    const auto checked = sunbudget::test::sunbudget({"check", plan.string()});
    INFO(checked.err);
    CHECK(checked.exit_code == 0);
    CHECK_THAT(checked.out, Contains("surface reflectance, Landsat 8, Collection 2: from") &&
                                Contains("scale 2.75e-05, offset -0.2 (from the profile)") &&
                                Contains("same grid") && Contains("covers 100.0 % of the grid") &&
                                Contains("1st to 99th percentile") &&
                                Contains("albedo liang2001") &&
                                Contains("surface.reflectance.reject: "));
}
