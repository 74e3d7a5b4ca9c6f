// What-ifs beside the base: each equals a run of its own, bit for bit.
#include <catch2/catch.hpp>

#include <cmath>
#include <map>
#include <sstream>

#include "desk.hpp"
#include "raster/input_support.hpp"

using namespace sunbudget::test;
using Catch::Contains;

namespace {

constexpr int width = 300, height = 280, cell = 2;

/// Shares of pixels inside the polygons below: borders of pixels, but for one that is cut in halves.
double share_at(int c, int r) {
    const auto inside = [&](int left, int top, int right, int bottom) {
        return c >= left && c < right && r >= top && r < bottom;
    };
    if (inside(60, 50, 90, 80) || inside(240, 245, 270, 270)) return 1;
    return inside(150, 100, 151, 140) ? 0.5 : inside(151, 100, 180, 140) ? 1 : 0;
}

/// Parts of 256, so that mixtures in halves and quarters are exact in a float and in the stored step.
double albedo_at(int c, int r) {
    return (5 + (c * 7 + r * 13) % 70) / 256.0;
}
double emissivity_at(int c, int r) {
    return (230 + (c * 3 + r) % 20) / 256.0;
}
double cover_at(int c, int r) {
    return patchy(c / 8, r / 8);
}
/// Streets between houses on a hillside, in sixteenths of a metre.
double height_at(int c, int r) {
    const double ground =
        std::round(16 * (200 + 10 * std::sin(c / 40.0) + 8 * std::cos(r / 30.0))) / 16;
    return ground + (c / 25 % 2 == 0 && r / 20 % 2 == 0 ? 12 : 0);
}

std::string square(double left, double top, double right, double bottom, const std::string& kind) {
    const auto corner = [](double c, double r) {
        return "[" + std::to_string(500000 + cell * c) + "," + std::to_string(5500000 - cell * r) +
               "]";
    };
    return R"({"type":"Feature","properties":{"kind":")" + kind +
           R"(","metres":6},"geometry":{"type":"Polygon","coordinates":[[)" + corner(left, top) +
           "," + corner(left, bottom) + "," + corner(right, bottom) + "," + corner(right, top) +
           "," + corner(left, top) + "]]}}";
}

void make(const Desk& desk, const std::string& name, const std::function<double(int, int)>& value) {
    MadeRaster raster;
    raster.grid = square_grid(width, height, 500000, 5500000, cell);
    raster.bands = {value};
    make_raster(desk.path(name), raster);
}

/// One desk for all cases; `surface` is a line of the plan.
struct Street : Desk {
    explicit Street(const std::string& surface = "albedo: {raster: albedo.tif}") {
        make(*this, "albedo.tif", albedo_at);
        make(*this, "dem.tif", height_at);
        make(*this, "albedo_after.tif", [](int c, int r) {
            return albedo_at(c, r) + share_at(c, r) * (0.75 - albedo_at(c, r));
        });
        make(*this, "dem_after.tif",
             [](int c, int r) { return height_at(c, r) + share_at(c, r) * 6; });
        make(*this, "emissivity.tif", emissivity_at);
        make(*this, "emissivity_after.tif", [](int c, int r) {
            return emissivity_at(c, r) + share_at(c, r) * (0.875 - emissivity_at(c, r));
        });
        write(
            path("roofs.geojson"),
            R"({"type":"FeatureCollection","crs":{"type":"name","properties":{"name":"urn:ogc:def:crs:EPSG::32633"}},"features":[)" +
                square(60, 50, 90, 80, "flat") + "," + square(150.5, 100, 180, 140, "flat") + "," +
                square(240, 245, 270, 270, "flat") + "," + square(100, 200, 140, 220, "steep") +
                "]}");
        write(
            path("plan.yaml"),
            "sunbudget: 1\nsurface: {" + surface +
                "}\nterrain: {elevation: dem.tif, slope_from: flat, directions: 8, reach: 500 m}\n"
                "time: {from: 2025-01-01, to: 2025-07-31, step: 1 h, days: mid-month,\n"
                "       totals: [{name: winter, from: 2025-01-01, to: 2025-01-31}, {name: summer, "
                "from: 2025-07-01, to: 2025-07-31}]}\n"
                "outputs: {directory: out, layers: [albedo, insolation, direct, diffuse, "
                "reflected, net_shortwave, sunlit_hours, sky_view]}\n");
    }
    void done(const std::string& folder, const std::vector<std::string>& sets) const {
        std::vector<std::string> arguments{"run", "plan.yaml", "--quiet", "--out", folder};
        for (const auto& set : sets) arguments.insert(arguments.end(), {"--set", set});
        const auto outcome = run(arguments);
        CAPTURE(outcome.err);
        REQUIRE(outcome.exit_code == 0);
    }
    /// A layer after the change as the run on its own has it, and what is saved as the difference of the two.
    void agree(const std::string& layer, const std::string& own, bool has_saved) const {
        CAPTURE(layer, own);
        const auto before = pixels_of(path("out/" + layer + ".tif")),
                   after = pixels_of(path(own + "/" + layer + ".tif"));
        REQUIRE(same_pixels(pixels_of(path("out/" + layer + "__what.tif")), after));
        CHECK_FALSE(same_pixels(before, after));
        if (!has_saved) return;
        const auto saved = pixels_of(path("out/" + layer + "__what__saved.tif"));
        for (std::size_t i = 0; i < saved.size(); ++i)
            if (saved[i] != before[i] - after[i] &&
                !(std::isnan(saved[i]) && std::isnan(before[i] - after[i])))
                FAIL("pixel " << i << ": " << saved[i] << " saved of " << before[i] << ", "
                              << after[i] << " left");
    }
};

const std::string flat_roofs = "where: {file: roofs.geojson, query: \"kind = 'flat'\"}";

}  // namespace

TEST_CASE("changes: a change of albedo equals a run of its own, reflected light and all",
          "[cli][differential]") {
    const Street street;
    street.done("out", {"changes=[{name: what, " + flat_roofs +
                        ", albedo: {aged: 0.75, low: 0.5, high: 0.75}}]"});
    street.done("own", {"surface.albedo.raster=albedo_after.tif"});
    street.agree("albedo", "own", false);
    for (const auto* layer : {"insolation", "reflected", "net_shortwave"})
        street.agree(layer, "own", true);
    // What does not change is not written again.
    for (const auto* layer : {"direct", "diffuse", "sunlit_hours", "sky_view"})
        CHECK_FALSE(
            std::filesystem::exists(street.path("out/" + std::string(layer) + "__what.tif")));
    const auto treated = pixels_of(street.path("out/treated__what.tif"));
    const auto saved = pixels_of(street.path("out/net_shortwave__what__saved.tif"));
    const auto low = pixels_of(street.path("out/net_shortwave__what__saved_low.tif"));
    bool neighbour_loses = false;
    double sum = 0, sum_low = 0;
    for (int r = 0; r < height; ++r)
        for (int c = 0; c < width; ++c) {
            const auto i = static_cast<std::size_t>(r * width + c), summer = i + width * height;
            if (treated[i] != share_at(c, r))
                FAIL("pixel " << c << ", " << r << ": " << treated[i] << " treated");
            if (share_at(c, r) == 0) neighbour_loses = neighbour_loses || saved[summer] < 0;
            sum += saved[summer];
            sum_low += low[summer];
        }
    CHECK(neighbour_loses);
    CHECK(sum_low < sum);
    CHECK(sum_low > 0);
    CHECK(pixels_of(street.path("out/net_shortwave__what__saved_high.tif")) == saved);
}

TEST_CASE("changes: light to and fro between ground and sky, and clouds, follow a change of albedo",
          "[cli][differential]") {
    const Street street;
    make(street, "cloud.tif", [](int c, int r) { return (c + 2 * r) % 9 / 10.0; });
    const std::string change = "changes=[{name: what, " + flat_roofs + ", albedo: {aged: 0.75}}]";
    const std::string hills = "terrain.directions=8", level = "terrain={elevation: 200 m}";
    for (const auto& [ground, model] : {std::pair{hills, "bird-hulstrom1981"},
                                        {level, "bird-hulstrom1981"},
                                        {hills, "esra2000"}}) {
        CAPTURE(ground, model);
        for (const std::string folder : {"out", "own"})
            std::filesystem::remove_all(street.path(folder));
        std::vector<std::string> sets{ground, std::string("sky.model=") + model,
                                      "sky.cloud=cloud.tif",
                                      "outputs.layers=[insolation, diffuse, net_shortwave]"};
        auto own = sets;
        own.push_back("surface.albedo.raster=albedo_after.tif");
        sets.push_back(change);
        street.done("out", sets);
        street.done("own", own);
        for (const auto* layer : {"insolation", "net_shortwave"}) street.agree(layer, "own", true);
        // Only with light to and fro does sky light hang on the ground.
        if (std::string(model) != "esra2000") street.agree("diffuse", "own", true);
    }
}

TEST_CASE("changes: a change of height equals a run of its own, shadows and all",
          "[cli][differential]") {
    const Street street;
    street.done("own",
                {"surface.albedo.raster=albedo_after.tif", "terrain.elevation=dem_after.tif"});
    for (const std::string height : {"{add: 6 m}", "{attribute: metres}"}) {
        CAPTURE(height);
        std::filesystem::remove_all(street.path("out"));
        street.done("out", {"changes=[{name: what, " + flat_roofs +
                            ", albedo: {aged: 0.75}, height: " + height + "}]"});
        street.agree("albedo", "own", false);
        street.agree("sky_view", "own", false);
        for (const auto* layer :
             {"insolation", "direct", "diffuse", "reflected", "net_shortwave", "sunlit_hours"})
            street.agree(layer, "own", true);
    }
    // A raster of the heights after, everywhere.
    std::filesystem::remove_all(street.path("out"));
    std::filesystem::remove_all(street.path("own"));
    street.done("own", {"terrain.elevation=dem_after.tif"});
    street.done("out", {"changes=[{name: what, height: {raster: dem_after.tif}}]"});
    for (const auto* layer : {"direct", "net_shortwave"}) street.agree(layer, "own", true);
}

namespace {

/// The shipped WorldCover table with other cells in the row of one class, as own.csv.
void own_table(const Street& street, const std::string& code, const std::string& cells) {
    REQUIRE(shell("cd " + word(street.path()) + " && " + word(program_path()) +
                  " tables worldcover --csv > own.csv && "
                  "/usr/bin/python3 -c \"import csv\nrows = list(csv.DictReader(l for l in "
                  "open('own.csv') if l[0] != '#'))\n"
                  "out = csv.DictWriter(open('own.csv', 'w'), rows[0].keys())\nout.writeheader()\n"
                  "[out.writerow(r | (" +
                  cells + " if r['code'] == '" + code + "' else {})) for r in rows]\"")
                .exit_code == 0);
}

void make_classes(const Street& street) {
    MadeRaster cover;
    cover.grid = square_grid(width, height, 500000, 5500000, cell);
    cover.type = "Byte";
    cover.bands = {cover_at};
    make_raster(street.path("classes.tif"), cover);
}

}  // namespace

TEST_CASE("changes: classes of the land cover changed equal a table of one's own",
          "[cli][differential]") {
    Street street("cover: {raster: classes.tif, classes: worldcover}");
    make_classes(street);
    street.done("out",
                {"changes=[{name: what, where: {classes: [50]}, albedo: {aged: 0.6}}, {name: half, "
                 "where: {classes: [50]}, albedo: {aged: 0.6}, treatable: 0.5}]"});
    own_table(street, "50", "{'albedo': '0.6', 'albedo_high': '0.7'}");
    street.done("own", {"surface.cover.classes=own.csv"});
    for (const auto* layer : {"insolation", "reflected", "net_shortwave"})
        street.agree(layer, "own", true);
    // A coarser grid averages classes, and a change of one of them changes its part alone.
    for (const std::string folder : {"out", "own"})
        std::filesystem::remove_all(street.path(folder));
    street.done("out", {"grid.cell=10",
                        "changes=[{name: what, where: {classes: [50]}, albedo: {aged: 0.6}}]"});
    street.done("own", {"grid.cell=10", "surface.cover.classes=own.csv"});
    street.agree("albedo", "own", false);
    street.agree("net_shortwave", "own", true);
}

namespace {

/// Air and ground for heat radiation over the two upper flat roofs, in one period.
const std::vector<std::string> heat{
    "grid.bounds=[500000, 5499720, 500360, 5500000]", "time.totals=whole",
    "weather={air_temperature: 25 degC, relative_humidity: 0.5, station_elevation: 100 m}",
    "surface_temperature={air_plus: 8 K}", "surface.emissivity={raster: emissivity.tif}"};

std::vector<std::string> with(std::vector<std::string> sets, const std::vector<std::string>& more) {
    sets.insert(sets.end(), more.begin(), more.end());
    return sets;
}

}  // namespace

TEST_CASE("changes: albedo and emissivity together equal a run of its own in all of heat",
          "[cli][differential]") {
    const Street street;
    const auto sets = with(heat, {"outputs.layers=[albedo, net_shortwave, emissivity, "
                                  "longwave_down, longwave_up, net_longwave, net_radiation]"});
    street.done("out", with(sets, {"changes=[{name: what, " + flat_roofs +
                                   ", albedo: {aged: 0.75, low: 0.5}, emissivity: 0.875}]"}));
    street.done("own", with(sets, {"surface.albedo.raster=albedo_after.tif",
                                   "surface.emissivity={raster: emissivity_after.tif}"}));
    for (const auto* layer : {"albedo", "emissivity"}) {
        street.agree(layer, "own", false);
        CHECK_FALSE(std::filesystem::exists(
            street.path("out/" + std::string(layer) + "__what__saved.tif")));
    }
    for (const auto* layer : {"net_shortwave", "longwave_up", "net_longwave", "net_radiation"})
        street.agree(layer, "own", true);
    CHECK_FALSE(std::filesystem::exists(street.path("out/longwave_down__what.tif")));
    // Alone, the one changes light and all that is kept, the other heat radiation and the same.
    for (const auto* folder : {"out", "own"}) std::filesystem::remove_all(street.path(folder));
    street.done("out",
                with(sets, {"changes=[{name: what, " + flat_roofs + ", emissivity: 0.875}]"}));
    street.done("own", with(sets, {"surface.emissivity={raster: emissivity_after.tif}"}));
    for (const auto* layer : {"longwave_up", "net_longwave", "net_radiation"})
        street.agree(layer, "own", true);
    CHECK_FALSE(std::filesystem::exists(street.path("out/net_shortwave__what.tif")));
    std::filesystem::remove_all(street.path("out"));
    street.done("out",
                with(sets, {"changes=[{name: what, " + flat_roofs + ", albedo: {aged: 0.75}}]"}));
    CHECK_FALSE(std::filesystem::exists(street.path("out/longwave_up__what.tif")));
    CHECK(std::filesystem::exists(street.path("out/net_radiation__what__saved.tif")));
}

TEST_CASE("changes: a change of height has its own sky in view, and the heat that comes from it",
          "[cli][differential]") {
    const Street street;
    // Without layers that need the sun too: heat alone walks the terrain.
    for (const std::string layers : {"longwave_down, longwave_up, net_longwave, net_radiation, "
                                     "surface_temperature, emissivity",
                                     "longwave_down, net_longwave"}) {
        CAPTURE(layers);
        for (const auto* folder : {"out", "own"}) std::filesystem::remove_all(street.path(folder));
        const auto sets = with(heat, {"outputs.layers=[" + layers + "]"});
        street.done("out", with(sets, {"changes=[{name: what, " + flat_roofs +
                                       ", albedo: {aged: 0.75}, emissivity: 0.875, height: {add: "
                                       "6 m}}]"}));
        street.done("own", with(sets, {"surface.albedo.raster=albedo_after.tif",
                                       "surface.emissivity={raster: emissivity_after.tif}",
                                       "terrain.elevation=dem_after.tif"}));
        street.agree("longwave_down", "own", true);
        street.agree("net_longwave", "own", true);
        if (layers.find("up") == std::string::npos) continue;
        for (const auto* layer : {"longwave_up", "net_radiation", "surface_temperature"})
            street.agree(layer, "own", true);
        street.agree("emissivity", "own", false);
    }
}

TEST_CASE("changes: balanced temperature and index of changed classes equal a table of one's own",
          "[cli][differential]") {
    Street street("cover: {raster: classes.tif, classes: worldcover}");
    make_classes(street);
    const std::vector<std::string> balance{
        "grid.bounds=[500200, 5499720, 500600, 5500000]",  // has houses and bare ground
        "weather={air_temperature: 30 degC, relative_humidity: 0.4}",
        "surface_temperature={from: balance}",
        "time={at: 2025-07-15T11:00Z}",
        "terrain.slope_from=elevation",
        "outputs.layers=[emissivity, longwave_up, net_radiation, surface_temperature, sri]"};
    const auto agree = [&](const std::string& change, const std::string& code,
                           const std::string& cells, const std::vector<std::string>& more) {
        CAPTURE(change, more);
        for (const auto* folder : {"out", "own"}) std::filesystem::remove_all(street.path(folder));
        own_table(street, code, cells);
        street.done("out", with(with(balance, more), {"changes=[{name: what, where: {classes: [" +
                                                      code + "]}, " + change + "}]"}));
        street.done("own", with(with(balance, more), {"surface.cover.classes=own.csv"}));
        for (const auto* layer : {"emissivity", "sri"}) street.agree(layer, "own", false);
        for (const auto* layer : {"longwave_up", "net_radiation", "surface_temperature"})
            street.agree(layer, "own", true);
        return std::ranges::count_if(
            pixels_of(street.path("out/surface_temperature__what__saved.tif")),
            [](double kelvin) { return kelvin > 0; });
    };
    // A coating: cooler. The run's own emissivity is by class.
    CHECK(agree("albedo: {aged: 0.6}, emissivity: 0.875", "50",
                "{'albedo': '0.6', 'albedo_high': '0.7', 'emissivity': '0.875'}", {}) > 1000);
    CHECK(shell("gdalinfo " + word(street.path("out/surface_temperature__what__saved.tif")) +
                " | grep 'Unit Type: K'")
              .exit_code == 0);
    // Houses that become bare ground, with its emissivity; on a coarser grid, where pixels are mixed.
    const std::string bare =
        "{'albedo': '0.25', 'albedo_low': '0.15', 'albedo_high': '0.4', "
        "'emissivity': '0.92', 'kind': 'bare'}";
    agree("class: 60", "50", bare, {"grid.cell=10"});
    // Bare ground that becomes a meadow leaves the scope of the balance.
    agree("class: 30", "60",
          "{'albedo': '0.21', 'albedo_low': '0.16', 'albedo_high': '0.26', "
          "'emissivity': '0.95', 'kind': 'grass'}",
          {});
    const auto before = pixels_of(street.path("out/surface_temperature.tif")),
               after = pixels_of(street.path("out/surface_temperature__what.tif"));
    const auto known = [](const auto& pixels) {
        return std::ranges::count_if(pixels, [](double value) { return !std::isnan(value); });
    };
    CHECK(known(after) > 0);
    CHECK(known(after) < known(before));
}

TEST_CASE(
    "changes: the table of zones has heat before, after and saved, temperatures as means, and "
    "explain them all",
    "[cli][property]") {
    Street street("cover: {raster: classes.tif, classes: worldcover}");
    make_classes(street);
    write(
        street.path("parcels.geojson"),
        R"({"type":"FeatureCollection","crs":{"type":"name","properties":{"name":"urn:ogc:def:crs:EPSG::32633"}},"features":[)" +
            square(0, 0, 300, 280, "all") + "]}");
    const std::vector<std::string> sets{
        "weather={air_temperature: 30 degC, relative_humidity: 0.4}",
        "surface_temperature={from: balance}", "time={at: 2025-07-15T11:00Z}",
        "outputs.layers=[net_radiation, surface_temperature]",
        "changes=[{name: what, where: {classes: [50]}, albedo: {aged: 0.6}, emissivity: 0.9, "
        "cost: 20}]"};
    street.done("out", with(sets, {"zones={file: parcels.geojson, id: kind}"}));
    std::istringstream table(content(street.path("out/changes.csv")));
    std::vector<std::vector<std::string>> rows;
    for (std::string line; std::getline(table, line);) {
        std::istringstream parts(line);
        rows.emplace_back();
        for (std::string part; std::getline(parts, part, ',');) rows.back().push_back(part);
    }
    REQUIRE(rows.size() == 2);
    const auto cell = [&](const std::string& name) {
        CAPTURE(name);
        const auto at = std::ranges::find(rows[0], name);
        REQUIRE(at != rows[0].end());
        return std::stod(rows[1][static_cast<std::size_t>(at - rows[0].begin())]);
    };
    CHECK(cell("net_radiation_before_sum") - cell("net_radiation_after_sum") ==
          Approx(cell("net_radiation_saved_sum")).margin(1e-8 * cell("net_radiation_before_sum")));
    for (const std::string name : {"before", "after", "saved"}) {
        const auto file = name == "before" ? "" : name == "after" ? "__what" : "__what__saved";
        // Nine digits are written.
        CHECK(cell("surface_temperature_" + name + "_mean") ==
              Approx(mean_of(pixels_of(
                         street.path("out/surface_temperature" + std::string(file) + ".tif"))))
                  .epsilon(1e-6));
    }
    CHECK(cell("surface_temperature_saved_mean") > 1);
    std::vector<std::string> ask{"explain", "plan.yaml", "--at", "500301,5499899"};
    for (const auto& set : sets) ask.insert(ask.end(), {"--set", set});
    const auto explained = street.run(ask);
    CAPTURE(explained.err);
    CHECK(explained.exit_code == 0);
    CHECK_THAT(explained.out, Contains("net_radiation__what__saved_w_m2") &&
                                  Contains("surface_temperature__what__saved_k"));
}

TEST_CASE("changes: the same bits for any number of threads, the same pixels for any tile",
          "[cli][differential]") {
    const Street street;
    const std::string changes = "changes=[{name: what, " + flat_roofs +
                                ", albedo: {initial: 0.8}}, {name: trees, where: {file: "
                                "roofs.geojson}, height: {add: 5 m}}]";
    street.done("out", {changes, "engine.tile=128"});
    const auto again = street.run({"run", "plan.yaml", "--quiet", "--out", "again", "--threads",
                                   "3", "--set", changes, "--set", "engine.tile=128"});
    REQUIRE(again.exit_code == 0);
    CHECK(content(street.path("again/SHA256SUMS")) == content(street.path("out/SHA256SUMS")));
    street.done("large", {changes, "engine.tile=512"});
    for (const auto* file :
         {"net_shortwave__what__saved.tif", "net_shortwave__trees.tif", "treated__what.tif"})
        CHECK(same_pixels(pixels_of(street.path("out") / file),
                          pixels_of(street.path("large") / file)));
}

TEST_CASE("changes: the table of zones has before, after, saved and what that costs",
          "[cli][property]") {
    const Street street;
    write(
        street.path("parcels.geojson"),
        R"({"type":"FeatureCollection","crs":{"type":"name","properties":{"name":"urn:ogc:def:crs:EPSG::32633"}},"features":[)" +
            square(40, 40, 110, 100, "own roof") + "," + square(92, 40, 110, 100, "beside it") +
            "," + square(0, 0, 300, 280, "all") + "]}");
    street.done(
        "out",
        {"changes=[{name: what, " + flat_roofs +
             ", albedo: {aged: 0.75, low: 0.6}, treatable: 0.5, cost: 20, lifetime: 15}]",
         "zones={file: parcels.geojson, id: kind, layers: [net_shortwave]}", "outputs.unit=MJ/m2"});
    std::vector<std::map<std::string, std::string>> rows;
    std::vector<std::string> names;
    std::istringstream table(content(street.path("out/changes.csv")));
    for (std::string line; std::getline(table, line);) {
        std::vector<std::string> cells;
        std::istringstream parts(line);
        for (std::string cell; std::getline(parts, cell, ',');) cells.push_back(cell);
        if (names.empty()) {
            names = cells;
            continue;
        }
        auto& row = rows.emplace_back();
        for (std::size_t i = 0; i < cells.size(); ++i) row[names[i]] = cells[i];
    }
    REQUIRE(rows.size() == 3);
    const auto number = [&](std::size_t row, const std::string& name) {
        CAPTURE(row, name);
        REQUIRE_FALSE(rows[row][name].empty());
        return std::stod(rows[row][name]);
    };
    const auto of = [&](std::size_t row, const std::string& name) {
        return number(row, "net_shortwave_" + name);
    };
    // Nine digits are written.
    for (std::size_t i = 0; i < 3; ++i) {
        CHECK(of(i, "before_sum") - of(i, "after_sum") ==
              Approx(of(i, "saved_sum")).margin(1e-8 * of(i, "before_sum")));
        CHECK(of(i, "saved_summer_sum") + of(i, "saved_winter_sum") ==
              Approx(of(i, "saved_sum")).epsilon(1e-7).margin(1e-7));
    }
    // 30 x 30 pixels of 4 m2 of the map, at the central meridian 1 / 0.9996^2 of that on the ground; half of it treated.
    CHECK(number(0, "treated_m2") == Approx(30 * 30 * 4 / (0.9996 * 0.9996) / 2).epsilon(1e-6));
    CHECK(number(0, "cost") == Approx(20 * number(0, "treated_m2")).epsilon(1e-8));
    CHECK(of(0, "saved_per_cost") == Approx(of(0, "saved_sum") / number(0, "cost")).epsilon(1e-7));
    CHECK(of(0, "saved_per_cost_in_life") == Approx(15 * of(0, "saved_per_cost")).epsilon(1e-7));
    CHECK(of(0, "saved_low_sum") < of(0, "saved_sum"));
    CHECK(of(0, "saved_summer_sum") > 2 * of(0, "saved_winter_sum"));
    // The neighbour treats nothing, receives more, and that is shown.
    CHECK(number(1, "treated_m2") == 0);
    CHECK(of(1, "saved_sum") < 0);
    CHECK(rows[1]["net_shortwave_saved_per_cost"].empty());
    // The whole street: the raster's own sum, level ground, all pixels of one area to 1e-7 (see the first row).
    const auto saved = pixels_of(street.path("out/net_shortwave__what__saved.tif"));
    double sum = 0;
    for (const double value : saved) sum += value;
    CHECK(of(2, "saved_sum") == Approx(sum * 4 / (0.9996 * 0.9996) / 1000).epsilon(1e-6));
    CHECK_THAT(content(street.path("out/run.json")),
               Contains("what: saves") && Contains("1 other zones keep"));
}

TEST_CASE("changes: mistakes are said with what to do", "[cli][edge]") {
    const Street street;
    const auto said = [&](const std::string& change, int exit_code, const std::string& words) {
        const auto outcome =
            street.run({"check", "plan.yaml", "--set", "changes=[" + change + "]"});
        CAPTURE(change, outcome.err);
        CHECK(outcome.exit_code == exit_code);
        CHECK_THAT(outcome.err, Contains(words));
    };
    said("{name: a, where: {file: roofs.geojson, query: \"kind = 'flt'\"}, albedo: {aged: 0.6}}", 3,
         "no polygon is chosen");
    said("{name: a, where: {file: roofs.geojson, query: \"knd = 'flat'\"}, albedo: {aged: 0.6}}", 3,
         "the query cannot be used");
    said("{name: a, where: {file: roofs.geojson}, height: {attribute: metre}}", 3,
         "no field \"metre\"");
    said("{name: a, where: {file: none.gpkg}, albedo: {aged: 0.6}}", 3, "no such file");
    said(
        "{name: a, where: {file: roofs.geojson}, albedo: {aged: 0.6}}, {name: a, where: {file: "
        "roofs.geojson}, albedo: {aged: 0.7}}",
        2, "two changes are named");
    said("{name: a, where: {file: roofs.geojson}, emissivity: 0.9}", 2,
         "no layer of the run needs an emissivity");
    said("{name: a, where: {file: roofs.geojson}, emissivity: 0.9, albedo: {aged: 0.6}}", 0,
         "changes.a.emissivity: no layer of the run needs one");
}
