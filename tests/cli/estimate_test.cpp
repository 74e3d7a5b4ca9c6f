#include <sys/resource.h>
#include <sys/wait.h>
#include <unistd.h>

#include <catch2/catch.hpp>
#include <chrono>
#include <cstdint>
#include <filesystem>
#include <fstream>
#include <sstream>

#include "program.hpp"
#include "support/vectors.hpp"
#include "town.hpp"

using namespace sunbudget::test;

namespace {

namespace fs = std::filesystem;

/// What a child process took.
struct Taken {
    int status = -1;
    double seconds = 0;
    double memory_mb = 0;  ///< at its peak
};

Taken taken_by_run(const std::string& plan, const std::string& out) {
    const auto start = std::chrono::steady_clock::now();
    const pid_t child = fork();
    if (child == 0) {
        execl(program_path().c_str(), "sunbudget", "run", plan.c_str(), "--out", out.c_str(),
              "--threads", "2", "--quiet", static_cast<char*>(nullptr));
        _exit(127);
    }
    Taken taken;
    rusage usage{};
    wait4(child, &taken.status, 0, &usage);
    taken.seconds = std::chrono::duration<double>(std::chrono::steady_clock::now() - start).count();
    taken.memory_mb = static_cast<double>(usage.ru_maxrss) * 1024 / 1e6;
    return taken;
}

/// "1.3 GB", "45 MB", "800 kB" after a word, in MB.
double megabytes_after(const std::string& text, const std::string& word) {
    const auto at = text.find(word + " ");
    REQUIRE(at != text.npos);
    std::istringstream stream(text.substr(at + word.size() + 1));
    double number = 0;
    std::string unit;
    stream >> number >> unit;
    if (unit.starts_with("GB")) return number * 1000;
    if (unit.starts_with("kB")) return number / 1000;
    REQUIRE(unit.starts_with("MB"));
    return number;
}

double disk_mb(const fs::path& folder) {
    double bytes = 0;
    for (const auto& entry : fs::directory_iterator(folder))
        if (entry.path().extension() == ".tif") bytes += static_cast<double>(entry.file_size());
    return bytes / 1e6;
}

/// Holds what `check` says a plan will take against what its run then takes.
void compare(const std::string& plan) {
    const TemporaryFolder folder;
    const auto out = (folder.path() / "out").string();
    const auto checked = sunbudget::test::sunbudget({"check", plan, "--threads", "2"});
    INFO(checked.err);
    REQUIRE(checked.exit_code == 0);
    const auto line = checked.out.substr(checked.out.rfind("\n  time "));
    const auto taken = taken_by_run(plan, out);
    REQUIRE(WIFEXITED(taken.status));
    REQUIRE(WEXITSTATUS(taken.status) == 0);
    const double disk = disk_mb(out);
    // Time depends on what else the machine does, so it is told, not judged.
    WARN(plan << ":" << line << "  taken: " << taken.seconds << " s, " << taken.memory_mb << " MB, "
              << disk << " MB on disk");
    // Within 30 %, as the project promises.
    CHECK(megabytes_after(line, "output") == Approx(disk).epsilon(0.3));
    CHECK(megabytes_after(line, "memory") == Approx(taken.memory_mb).epsilon(0.3));
}

}  // namespace

TEST_CASE("check: disk and memory are within 30 % of what the demo's runs take", "[cli][vector]") {
    const TemporaryFolder folder;
    const std::string pipelines = (source_folder() / "pipelines/").string();
    const auto town = demo_town();
    if (!town) {
        WARN("SKIPPED: the demo town needs python3-numpy and python3-gdal");
        return;
    }
    for (const std::string name : {"demo.yaml", "demo-coarse.yaml"})
        fs::copy(pipelines + name, folder.path() / name);
    fs::create_directory_symlink(*town, folder.path() / "demo-town");
    compare((folder.path() / "demo.yaml").string());
    compare((folder.path() / "demo-coarse.yaml").string());
}

TEST_CASE("check: disk and memory are within 30 % of what a real scene takes", "[cli][vector]") {
    SUNBUDGET_NEEDS_DATA();
    const TemporaryFolder folder;
    const auto plan = folder.path() / "plan.yaml";
    std::ofstream(plan)
        << "sunbudget: 1\nsurface: {reflectance: {sensor: landsat-oli-c2, scene: \""
        << real_data("landsat_c2l2/LC08_L2SP_008059_20191201_20200825_02_T1")->string()
        << "\"}}\ntime: {from: 2019-12-01, to: 2019-12-31}\n"
           "outputs: {layers: [albedo, net_shortwave, quality]}\n";
    compare(plan.string());
}
