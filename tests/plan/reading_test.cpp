#include <catch2/catch.hpp>
#include <ctime>
#include <locale>

#include "plan_support.hpp"
#include "support/vectors.hpp"

namespace sunbudget::test {

namespace {

using Catch::Matchers::Contains;

std::string first_problem(const std::string& text) {
    const auto problems = problems_of({"plan.yaml", text, {}});
    return problems.empty() ? "none" : text_of(problems.front());
}

// Anything that grows with the nesting or the square of the length would take minutes. The processor's
// time is taken, which another program at the same core still makes longer: hence three seconds.
constexpr double fast_s = 3.0;

double seconds_to_refuse(const std::string& text) {
    const auto start = std::clock();
    CHECK_FALSE(problems_of({"plan.yaml", text, {}}).empty());
    return static_cast<double>(std::clock() - start) / CLOCKS_PER_SEC;
}

std::string repeated(const std::string& text, int times) {
    std::string all;
    for (int i = 0; i < times; ++i) all += text;
    return all;
}

std::string many_keys(int count) {
    std::string keys;
    for (int i = 0; i < count; ++i) keys += "k" + std::to_string(i) + ": 1\n";
    return keys;
}

std::string alias_bomb() {
    std::string bomb = "a0: &a0 [x, x]\n";
    for (int i = 1; i < 30; ++i) {
        const auto name = "a" + std::to_string(i);
        const auto last = "*a" + std::to_string(i - 1);
        bomb += name + ": &" + name + " [" + last + "," + last + "]\n";
    }
    return bomb;
}

struct GermanNumbers : std::numpunct<char> {
    char do_decimal_point() const override { return ','; }
    char do_thousands_sep() const override { return '.'; }
    std::string do_grouping() const override { return "\3"; }
};

// The system's own locale also changes what the C library reads; where it is missing, C++ streams
// at least write and expect a comma.
std::locale german() {
    try {
        return std::locale("de_DE.UTF-8");
    } catch (const std::runtime_error&) {
        return {std::locale::classic(), new GermanNumbers};
    }
}

}  // namespace

TEST_CASE("every member of a plan has the value of its key", "[plan][vector]") {
    const auto plan = read_plan(testdata("plans/good/everything.yaml"));
    const auto folder = testdata("plans/good");
    CHECK(**plan.title == "Hot afternoons: a town");
    CHECK(std::get<LikeInput>(**plan.grid.like) == LikeInput::surface);
    CHECK(**plan.grid.bounds == std::array{399960.0, 4990200.5, 410000.0, 5000040.0});
    CHECK(**plan.grid.cell == 10);
    REQUIRE(plan.surface.cover);
    CHECK(plan.surface.cover->raster->path.given == "inputs/cover map.tif");
    CHECK(plan.surface.cover->raster->path.file == folder / "inputs/cover map.tif");
    CHECK(plan.surface.cover->raster->band == "2");
    CHECK(std::get<PlanPath>(*plan.surface.cover->classes).given == "tables/own.csv");
    CHECK(**plan.surface.cover->default_class == 50);
    CHECK(std::get<std::vector<PlanRaster>>(**plan.terrain.elevation).front().band == "height");
    CHECK(**plan.sky.model == "esra2000");
    CHECK(turbidity_of(plan)[5] == 3.7);
    CHECK(**plan.time.from == CivilDate{2024, 2, 29});
    CHECK(**plan.time.to == CivilDate{2025, 2, 28});
    CHECK(**plan.time.step_s == 3600);
    CHECK(**plan.time.hours == HourWindow{6.5, 18});
    CHECK(plan.time.zone->value.zone.name() == "Europe/Berlin");
    const auto& periods = std::get<std::vector<NamedPeriod>>(**plan.time.totals);
    REQUIRE(periods.size() == 2);
    CHECK(*periods[1].name == "summer, hot part");
    CHECK(*periods[1].to == CivilDate{2024, 8, 31});
    CHECK(plan.outputs.directory->value.file == testdata("plans") / "out");
    CHECK(plan.outputs.layers.size() == 6);
    CHECK(*plan.outputs.layers[4] == LayerId::net_shortwave);
    CHECK(**plan.outputs.unit == OutputUnit::kwh_m2);
    CHECK(**plan.outputs.format == FileFormat::geotiff);
    CHECK(**plan.engine.tile == 1024);
}

TEST_CASE("numbers are decimal, whatever an older YAML would make of them", "[plan][vector]") {
    const auto plan = read_plan(testdata("plans/good/numbers.yaml"));
    CHECK(**plan.surface.cover->default_class == 10);
    CHECK(**plan.grid.bounds == std::array{-1000.0, -0.5, 2500.0, 1.0});
    CHECK(**plan.grid.cell == 0.5);
    CHECK(turbidity_of(plan)[11] == 3);
    const auto words = read_plan(testdata("plans/good/odd_names.yaml"));
    CHECK(**words.title == "no");
    CHECK(std::get<std::vector<PlanRaster>>(**words.terrain.elevation).front().path.given == "y");
}

TEST_CASE("quantities are read in their own unit", "[plan][vector]") {
    const auto height = [](const std::string& text) {
        const auto plan = plan_of(small_plan + "terrain: {elevation: " + text + "}\n");
        return std::get<PlanLength>(**plan.terrain.elevation).m;
    };
    CHECK(height("250 m") == 250);
    CHECK(height("-0.42 km") == -420);
    // The international foot is 0.3048 m by definition; the product may miss by the last bit.
    CHECK(height("1000 ft") == Approx(304.8).epsilon(1e-15));
    const auto step = [](const std::string& text) {
        const auto time = "time: {from: 2025-06-01, to: 2025-06-02, step: " + text + "}\n";
        return **plan_of(small_plan + time).time.step_s;
    };
    CHECK(step("90 s") == 90);
    CHECK(step("0.1 h") == 360);
    CHECK(step("15min") == 900);
}

TEST_CASE("a band is what follows the last colon unless a slash follows it", "[plan][vector]") {
    const auto raster = [](const std::string& text) {
        const auto plan = plan_of(small_plan + "terrain: {elevation: \"" + text + "\"}\n");
        return std::get<std::vector<PlanRaster>>(**plan.terrain.elevation).front();
    };
    CHECK(raster("dem.tif").band.empty());
    CHECK(raster("dem.tif:3").band == "3");
    CHECK(raster("a:b/dem.tif").path.given == "a:b/dem.tif");
    CHECK(raster("a:b.tif:height").path.given == "a:b.tif");
    CHECK(raster("https://host/dem.tif").path.file == "https://host/dem.tif");
    CHECK(raster("/abs/dem.tif").path.file == "/abs/dem.tif");
    CHECK(raster("../dem.tif").path.file == "/dem.tif");
}

TEST_CASE("every value knows its file, line and key", "[plan][property]") {
    const auto plan = plan_of(
        "sunbudget: 1\nsurface:\n  cover:\n    raster: c.tif\n    classes: lcz\n"
        "outputs:\n  layers:\n    - albedo\n    - quality\n");
    CHECK(plan.surface.cover->place.text() == "/plans/plan.yaml:3: surface.cover");
    CHECK(plan.surface.cover->raster.place.text() == "/plans/plan.yaml:4: surface.cover.raster");
    CHECK(plan.outputs.layers[1].place.text() == "/plans/plan.yaml:9: outputs.layers[2]");
    CHECK(with_defaults(plan).sky.model->place.text() == "default of sky.model");
}

TEST_CASE("defaults fill in what applies and nothing else", "[plan][property]") {
    const auto plan = with_defaults(plan_of(small_plan));
    CHECK(**plan.sky.model == "esra2000");
    CHECK(turbidity_of(plan)[0] == 3);
    CHECK(**plan.outputs.unit == OutputUnit::w_m2);
    CHECK(**plan.outputs.format == FileFormat::cog);
    CHECK(plan.outputs.directory->value.file == "/plans/out");
    CHECK(**plan.engine.tile == 512);
    CHECK_FALSE(plan.time.step_s);
    CHECK_FALSE(plan.surface.cover);
    const auto period =
        with_defaults(plan_of(small_plan + "time: {from: 2025-06-01, to: 2025-06-02}\n"));
    CHECK(**period.time.step_s == 600);
    CHECK(period.time.step_s->place.is_default);
    CHECK_FALSE(period.time.from->place.is_default);
    CHECK(period.time.zone->value.zone.kind() == ZoneKind::solar_mean);
    CHECK(std::get<Totals>(**period.time.totals) == Totals::whole);
    CHECK_FALSE(period.time.hours);
    const auto cover =
        with_defaults(plan_of("sunbudget: 1\nsurface: {cover: {raster: c.tif, classes: "
                              "lcz}}\noutputs: {layers: [albedo]}"));
    CHECK(**cover.surface.cover->default_class == std::nullopt);
}

TEST_CASE("texts that are no UTF-8, or hide something, are refused with their line",
          "[plan][edge]") {
    CHECK_THAT(first_problem(""), Contains("empty") && Contains("plan.yaml:1"));
    CHECK_THAT(first_problem(small_plan + "title: caf\xe9\n"),
               Contains("not UTF-8") && Contains("plan.yaml:5"));
    CHECK_THAT(first_problem("title: \xc0\xaf\n"), Contains("not UTF-8"));      // overlong slash
    CHECK_THAT(first_problem("title: \xed\xa0\x80\n"), Contains("not UTF-8"));  // surrogate
    CHECK_THAT(first_problem("title: \xf4\x90\x80\x80\n"), Contains("not UTF-8"));
    CHECK_THAT(first_problem("title: \xe2\x82"), Contains("not UTF-8"));  // cut short
    CHECK_THAT(first_problem(std::string("\xff\xfes\0u\0", 6)), Contains("not UTF-8"));
    CHECK_THAT(first_problem("title: a\x1b[31m\n"), Contains("control character"));
    CHECK_THAT(first_problem(std::string("title: a\0b\n", 11)), Contains("control character"));
    CHECK(**plan_of(small_plan + "title: caf\xc3\xa9 \xe2\x82\xac \xf0\x9f\x8c\x9e\n").title ==
          "caf\xc3\xa9 \xe2\x82\xac \xf0\x9f\x8c\x9e");
}

TEST_CASE("a byte order mark and Windows line ends are no problem", "[plan][edge]") {
    std::string text = "\xef\xbb\xbf";
    for (const char c : small_plan + "title: \"Hot: days\"\n")
        text += c == '\n' ? "\r\n" : std::string(1, c);
    CHECK(**plan_of(text).title == "Hot: days");
    CHECK_THAT(first_problem(text + "engine: ! {}\r\n"), Contains("a tag") && Contains(":6"));
    CHECK_THAT(first_problem(text + "sky: {model: ! x}\r\n"), Contains("a tag") && Contains(":6"));
}

TEST_CASE("long, deep and exploding plans are refused for what they are", "[plan][edge]") {
    CHECK_THAT(first_problem(std::string(std::size_t{1} << 20, ' ') + "a"), Contains("1 MiB"));
    CHECK_THAT(first_problem("a: " + repeated("[", 40) + repeated("]", 40)), Contains("32 levels"));
    CHECK_THAT(first_problem("a: [" + repeated("1,", 100'001) + "1]"), Contains("100,000 values"));
    CHECK_THAT(first_problem(many_keys(60'000)), Contains("1,000 keys"));
    CHECK_THAT(first_problem(repeated("[", 200'000)), Contains("missing bracket"));
    CHECK_THAT(first_problem(alias_bomb()), Contains("anchor"));
}

TEST_CASE("no plan takes long to refuse", "[plan][edge]") {
    CHECK(seconds_to_refuse(repeated("[", 200'000)) < fast_s);
    CHECK(seconds_to_refuse(repeated("- ", 500'000)) < fast_s);
    CHECK(seconds_to_refuse(repeated("{a: ", 200'000)) < fast_s);
    CHECK(seconds_to_refuse(many_keys(60'000)) < fast_s);
    CHECK(seconds_to_refuse(alias_bomb()) < fast_s);
    CHECK(seconds_to_refuse(small_plan + "sky: {turbidity: [" + repeated("x,", 90'000) + "x]}") <
          fast_s);
    std::string names;
    for (int i = 0; i < 90'000; ++i) names += "n" + std::to_string(i) + ",";
    CHECK(seconds_to_refuse("outputs: {layers: [" + names + "albedo]}") < fast_s);
    CHECK(seconds_to_refuse("outputs: {layers: [" + repeated("albedo,", 90'000) + "albedo]}") <
          fast_s);
}

TEST_CASE("a plan with very many problems tells the first hundred", "[plan][edge]") {
    std::string text = small_plan;
    for (int i = 0; i < 150; ++i) text += "key" + std::to_string(i) + ": 1\n";
    const auto problems = problems_of({"plan.yaml", text, {}});
    REQUIRE(problems.size() == 101);
    CHECK(problems.back().what == "there are 50 more problems");
}

TEST_CASE("a missing plan file is an input that is missing", "[plan][edge]") {
    const TemporaryFolder folder;
    for (const auto& path : {folder.path() / "none.yaml", folder.path()}) {
        try {
            (void)read_plan(path);
            FAIL("was read");
        } catch (const Error& error) {
            CHECK(error.cause() == Cause::input);
        }
    }
}

TEST_CASE("the locale does not change how numbers are read and written", "[plan][differential]") {
    const auto file = testdata("plans/good/everything.yaml");
    const auto before = read_plan(file);
    const auto text = plan_text(before);
    const auto schema = plan_schema_json();
    const std::locale old;
    std::locale::global(german());
    const auto after = read_plan(file);
    const auto text_after = plan_text(after);
    const auto schema_after = plan_schema_json();
    std::locale::global(old);
    CHECK(after == before);
    CHECK(text_after == text);
    CHECK(schema_after == schema);
}

}  // namespace sunbudget::test
