// File names as odd as the system allows.
#include <sys/stat.h>

#include <catch2/catch.hpp>

#include "desk.hpp"

using namespace sunbudget::test;
using Catch::Contains;
namespace fs = std::filesystem;

namespace {
const std::vector<std::string> odd_names{
    "with space.tif",   "-dash.tif",      "quote'\".tif",
    "a=b,[c]{d}#e.tif", "with:colon.tif", "\xc3\xa4\xe6\x97\xa5.tif",
    "new\nline.tif",    "tab\t.tif",      "not\xffutf8.tif",
    "%20.tif",          "*?.tif",         "~.tif",
    "no-ending"};
}

TEST_CASE("albedo: reads and writes files of any name", "[cli][edge]") {
    const Desk desk;
    REQUIRE(
        desk.run({"albedo", "--cover", "cover.tif", "--classes", "worldcover", "-o", "plain.tif"})
            .exit_code == 0);
    const auto expected = pixels_of(desk.path("plain.tif"));
    for (const auto& name : odd_names) {
        fs::create_directories(desk.path("results"));
        fs::copy_file(desk.path("cover.tif"), desk.path(name));
        const auto outcome = desk.run(
            {"albedo", "--cover=" + name, "--classes", "worldcover", "--output=results/" + name});
        CAPTURE(name, outcome.err);
        CHECK(outcome.exit_code == 0);
        CHECK(well_formed(outcome.err));
        CHECK(names_in(desk.path("results")) == std::vector<std::string>{name});
        if (outcome.exit_code == 0)
            CHECK(same_pixels(pixels_of(desk.path("results/" + name)), expected));
        fs::remove_all(desk.path("results"));
        fs::remove(desk.path(name));
    }
}

TEST_CASE("run: plans and folders may have any name", "[cli][edge]") {
    const Desk desk;
    for (const auto& name : odd_names) {
        const auto folder = desk.path(name + ".d");
        fs::create_directory(folder);
        fs::copy_file(desk.path("cover.tif"), folder / "cover.tif");
        fs::copy_file(desk.path("plan.yaml"), folder / (name + ".yaml"));
        const auto outcome =
            desk.run({"run", (folder / (name + ".yaml")).string(), "--out=" + name + ".out"});
        CAPTURE(name, outcome.err);
        CHECK(outcome.exit_code == 0);
        CHECK(well_formed(outcome.err));
        CHECK(names_in(desk.path(name + ".out")).size() == 4);
    }
}

TEST_CASE("sunbudget: a name in a message cannot steer the terminal", "[cli][edge]") {
    const Desk desk;
    const auto outcome = desk.run(
        {"albedo", "--cover", "\x1b[2Jgone\n.tif", "--classes", "worldcover", "-o", "a.tif"});
    CAPTURE(outcome.err);
    CHECK(outcome.exit_code == 3);
    CHECK_THAT(outcome.err, Contains("\\x1B[2Jgone\\x0A.tif", Catch::CaseSensitive::No));
    CHECK(well_formed(outcome.err));
}

TEST_CASE("albedo: an output that is a folder, a link to one or a pipe is refused", "[cli][edge]") {
    const Desk desk;
    fs::create_directory(desk.path("folder"));
    fs::create_directory_symlink("folder", desk.path("link"));
    REQUIRE(mkfifo(desk.path("pipe").c_str(), 0600) == 0);
    for (const auto* out : {"folder", "folder/", "new/", "link", "pipe", ".", ""}) {
        const auto outcome =
            desk.run({"albedo", "--cover", "cover.tif", "--classes", "worldcover", "-o", out});
        CAPTURE(out, outcome.err);
        CHECK(outcome.exit_code == 2);
        CHECK_THAT(outcome.err, Contains("--output"));
        CHECK(names_in(desk.path("folder")).empty());
    }
    CHECK(fs::is_fifo(desk.path("pipe")));
}
