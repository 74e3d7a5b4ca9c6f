// The output folder: what is left alone, what is replaced, what is refused.
#include <fcntl.h>
#include <sys/file.h>
#include <sys/stat.h>
#include <unistd.h>
#include <catch2/catch.hpp>

#include "desk.hpp"

using namespace sunbudget::test;
using Catch::Contains;
namespace fs = std::filesystem;

namespace {
const std::vector<std::string> whole_set{"SHA256SUMS", "albedo.tif", "net_shortwave.tif",
                                         "run.json"};
}

TEST_CASE("run: a complete folder is left as it is, and the run says so", "[cli]") {
    const Desk desk;
    REQUIRE(desk.run({"run", "plan.yaml"}).exit_code == 0);
    CHECK(names_in(desk.path("out")) == whole_set);
    CHECK(shell("cd " + word(desk.path("out")) + " && sha256sum -c --quiet SHA256SUMS").exit_code ==
          0);
    const auto before = fs::last_write_time(desk.path("out/albedo.tif"));
    const auto again = desk.run({"run", "plan.yaml"});
    CHECK(again.exit_code == 0);
    CHECK_THAT(again.err, Contains("complete already"));
    CHECK(fs::last_write_time(desk.path("out/albedo.tif")) == before);
    const auto fresh = desk.run({"run", "plan.yaml", "--fresh"});
    CHECK(fresh.exit_code == 0);
    CHECK_THAT(fresh.err, !Contains("complete already"));
    CHECK(fs::last_write_time(desk.path("out/albedo.tif")) != before);
    CHECK(names_in(desk.path("out")) == whole_set);
}

TEST_CASE("run: another run's results are refused, and replaced with --fresh", "[cli]") {
    const Desk desk;
    REQUIRE(desk.run({"run", "plan.yaml"}).exit_code == 0);
    const auto other = desk.run({"run", "plan.yaml", "--set", "sky.turbidity=5"});
    CHECK(other.exit_code == 4);
    CHECK_THAT(other.err, Contains("another run") && Contains("--fresh"));
    SECTION("with changed inputs too") {
        make_cover(desk.path("cover.tif"), 80, 60, [](int, int) { return 10; });
        CHECK(desk.run({"run", "plan.yaml"}).exit_code == 4);
    }
    SECTION("--fresh removes files that the new run does not have") {
        CHECK(desk.run({"run", "plan.yaml", "--fresh", "--set", "outputs.layers=[albedo]"})
                  .exit_code == 0);
        CHECK(names_in(desk.path("out")) ==
              std::vector<std::string>{"SHA256SUMS", "albedo.tif", "run.json"});
    }
}

TEST_CASE("run: a folder whose set is damaged is made anew", "[cli][edge]") {
    const Desk desk;
    REQUIRE(desk.run({"run", "plan.yaml"}).exit_code == 0);
    fs::remove(desk.path("out/albedo.tif"));
    CHECK(desk.run({"run", "plan.yaml"}).exit_code == 0);
    CHECK(names_in(desk.path("out")) == whole_set);
}

TEST_CASE("run: a folder that cannot be written ends with 4", "[cli][edge]") {
    const Desk desk;
    write(desk.path("file"), "in the way");
    fs::create_directory(desk.path("closed"));
    chmod(desk.path("closed").c_str(), 0555);
    // The superuser may write into any folder, so he is given one that nobody can write to.
    const auto closed =
        geteuid() == 0 ? std::string("/proc/sunbudget-out") : desk.path("closed").string();
    for (const auto& folder : {std::string("file"), std::string("file/deeper"), closed}) {
        const auto outcome = desk.run({"run", "plan.yaml", "--out", folder});
        CAPTURE(folder, outcome.err);
        CHECK(outcome.exit_code == 4);
        CHECK_THAT(outcome.err,
                   Contains("sunbudget: error: ") && Contains(folder) && Contains("--out"));
        CHECK(well_formed(outcome.err));
    }
    const auto single = desk.run(
        {"albedo", "--cover", "cover.tif", "--classes", "worldcover", "-o", "/proc/a.tif"});
    CHECK(single.exit_code == 4);
    CHECK_THAT(single.err, Contains("name another file with --output"));
}

TEST_CASE("run: a folder that another run holds is refused with its process", "[cli][edge]") {
    const Desk desk;
    fs::create_directory(desk.path("out"));
    const int lock =
        open(desk.path("out/.sunbudget.lock").c_str(), O_RDWR | O_CREAT | O_CLOEXEC, 0644);
    REQUIRE(flock(lock, LOCK_EX | LOCK_NB) == 0);
    REQUIRE(::write(lock, "process 123\n", 12) == 12);
    const auto outcome = desk.run({"run", "plan.yaml"});
    CAPTURE(outcome.err);
    CHECK(outcome.exit_code == 4);
    CHECK_THAT(outcome.err, Contains("another run is writing here: process 123"));
    close(lock);
    CHECK(desk.run({"run", "plan.yaml"}).exit_code == 0);
}

TEST_CASE("run: a full disk ends with 4 and leaves no half file", "[cli][edge]") {
    if (geteuid() != 0 || shell("unshare -m true").exit_code != 0) {
        WARN("SKIPPED: only the superuser may mount a small disk");
        return;
    }
    const Desk desk;
    make_cover(desk.path("cover.tif"), 900, 700, [](int c, int r) { return patchy(c * 3, r * 2); });
    fs::create_directory(desk.path("disk"));
    // In the first size the run sees that it cannot fit; in the second it has begun to write.
    for (const auto* size : {"16k", "80k"}) {
        const auto outcome = shell("cd " + word(desk.path()) +
                                   " && unshare -m sh -c 'mount -t tmpfs -o size=" + size +
                                   " none disk && { " + program_path() +
                                   " run plan.yaml --out disk/out --set "
                                   "outputs.layers=[albedo,direct,insolation,net_shortwave]; "
                                   "echo code $?; ls -A disk/out; }'");
        CAPTURE(size, outcome.out, outcome.err);
        CHECK(outcome.out == "code 4\n");
        CHECK_THAT(outcome.err, Contains("sunbudget: error: ") && Contains("free"));
        CHECK(well_formed(outcome.err.substr(0, outcome.err.find("ls:"))));
    }
}

TEST_CASE("run: an output that would replace an input is refused", "[cli][edge]") {
    const Desk desk;
    fs::create_directory(desk.path("out"));
    fs::copy_file(desk.path("cover.tif"), desk.path("out/albedo.tif"));
    const auto before = content(desk.path("out/albedo.tif"));
    const auto outcome =
        desk.run({"run", "plan.yaml", "--set", "surface.cover.raster=out/albedo.tif"});
    CHECK(outcome.exit_code == 2);
    CHECK_THAT(outcome.err, Contains("its own input") && Contains("albedo.tif"));
    CHECK(content(desk.path("out/albedo.tif")) == before);
}

TEST_CASE("albedo: an output that is its own input is refused, by any name", "[cli][edge]") {
    const Desk desk;
    fs::create_symlink("cover.tif", desk.path("link.tif"));
    const auto before = content(desk.path("cover.tif"));
    for (const auto* out : {"cover.tif", "./cover.tif", "link.tif"}) {
        const auto outcome =
            desk.run({"albedo", "--cover", "cover.tif", "--classes", "worldcover", "-o", out});
        CAPTURE(out, outcome.err);
        CHECK(outcome.exit_code == 2);
        CHECK(content(desk.path("cover.tif")) == before);
    }
}

TEST_CASE("albedo: an input may bear a layer's name when the output bears another", "[cli][edge]") {
    const Desk desk;
    fs::rename(desk.path("cover.tif"), desk.path("albedo.tif"));
    const auto outcome =
        desk.run({"albedo", "--cover", "albedo.tif", "--classes", "worldcover", "-o", "a.tif"});
    CAPTURE(outcome.err);
    CHECK(outcome.exit_code == 0);
    CHECK(names_in(desk.path()) == std::vector<std::string>{"a.tif", "albedo.tif", "plan.yaml"});
}

TEST_CASE("run: a link at an output's name is replaced, not followed", "[cli][edge]") {
    const Desk desk;
    write(desk.path("precious"), "precious");
    fs::create_directory(desk.path("out"));
    for (const auto* name : {"out/albedo.tif", "out/run.json", "out/SHA256SUMS", "a.tif"})
        fs::create_symlink(desk.path("precious"), desk.path(name));
    CHECK(desk.run({"run", "plan.yaml"}).exit_code == 0);
    CHECK(desk.run({"albedo", "--cover", "cover.tif", "--classes", "worldcover", "-o", "a.tif"})
              .exit_code == 0);
    CHECK(content(desk.path("precious")) == "precious");
    CHECK_FALSE(fs::is_symlink(desk.path("out/albedo.tif")));
    CHECK_FALSE(fs::is_symlink(desk.path("a.tif")));
}

TEST_CASE("run: a link as the output folder leads where it points", "[cli][edge]") {
    const Desk desk;
    fs::create_directory(desk.path("real"));
    fs::create_directory_symlink("real", desk.path("out"));
    CHECK(desk.run({"run", "plan.yaml"}).exit_code == 0);
    CHECK(names_in(desk.path("real")) == whole_set);
    CHECK(fs::is_symlink(desk.path("out")));
}

TEST_CASE("run: a report is published with the rest, the same bytes every time, and later too",
          "[cli]") {
    const Desk desk;
    REQUIRE(desk.run({"run", "plan.yaml"}).exit_code == 0);
    CHECK(names_in(desk.path("out")) == whole_set);
    const auto albedo = content(desk.path("out/albedo.tif"));
    // Asked for afterwards: the run is done again, its rasters are the same.
    const auto later = desk.run({"run", "plan.yaml", "--set", "report.html=true"});
    CAPTURE(later.err);
    CHECK(later.exit_code == 0);
    auto with_report = whole_set;
    with_report.insert(with_report.begin() + 3, "report.html");
    CHECK(names_in(desk.path("out")) == with_report);
    CHECK(content(desk.path("out/albedo.tif")) == albedo);
    CHECK(shell("cd " + word(desk.path("out")) + " && sha256sum -c --quiet SHA256SUMS").exit_code ==
          0);
    CHECK_THAT(content(desk.path("out/SHA256SUMS")), Contains("  report.html"));
    const auto report = content(desk.path("out/report.html"));
    CHECK_THAT(report, Contains("cover.tif") && Contains("Kasten"));
    CHECK_THAT(desk.run({"run", "plan.yaml", "--set", "report.html=true"}).err,
               Contains("complete already"));
    CHECK_THAT(desk.run({"run", "plan.yaml"}).err, Contains("complete already"));
    REQUIRE(desk.run({"run", "plan.yaml", "--set", "report.html=true", "--fresh", "--threads", "1"})
                .exit_code == 0);
    CHECK(content(desk.path("out/report.html")) == report);
    REQUIRE(desk.run({"run", "plan.yaml", "--set", "report.html=true", "--set",
                      "outputs.format=geotiff", "--fresh"})
                .exit_code == 0);
    CHECK_THAT(content(desk.path("out/report.html")), Contains("<img alt=\"Map of albedo"));
    CHECK(desk.run({"run", "plan.yaml", "--set", "report.html=maybe"}).exit_code == 2);
}
