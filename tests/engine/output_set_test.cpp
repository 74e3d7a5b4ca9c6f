#include "sunbudget/engine/output_set.hpp"

#include <sys/wait.h>
#include <unistd.h>
#include <catch2/catch.hpp>
#include <fstream>
#include <iterator>

#include "sunbudget/base/digest.hpp"
#include "sunbudget/base/error.hpp"
#include "support/vectors.hpp"

using namespace sunbudget;
namespace fs = std::filesystem;

namespace {

std::string content(const fs::path& file) {
    std::ifstream stream(file);
    return {std::istreambuf_iterator<char>(stream), {}};
}

std::size_t entries(const fs::path& folder) {
    return static_cast<std::size_t>(
        std::distance(fs::directory_iterator(folder), fs::directory_iterator()));
}

void make_set(const fs::path& folder, const std::vector<std::string>& names,
              const std::string& text) {
    OutputSet set(folder, OutputSet::Mark::checksums);
    for (const auto& name : names) write_text_file(set.staged(name), text);
    set.publish(names);
}

}  // namespace

TEST_CASE("OutputSet: publishes all files and a checksum list that agrees with them", "[engine]") {
    test::TemporaryFolder folder;
    make_set(folder.path() / "out", {"a.tif", "run.json"}, "x");
    CHECK(content(folder.path() / "out/SHA256SUMS") ==
          sha256_of("x") + "  a.tif\n" + sha256_of("x") + "  run.json\n");
    CHECK(complete_set(folder.path() / "out") == std::vector<std::string>{"a.tif", "run.json"});
    CHECK(entries(folder.path() / "out") == 3);  // no lock, no staging folder
}

TEST_CASE("OutputSet: what is not published leaves nothing behind", "[engine][edge]") {
    test::TemporaryFolder folder;
    const auto out = folder.path() / "out";
    {
        OutputSet set(out, OutputSet::Mark::checksums);
        write_text_file(set.staged("a.tif"), "x");
    }
    CHECK_FALSE(fs::exists(out));
    CHECK(complete_set(out).empty());
}

TEST_CASE("OutputSet: an older set is replaced as a whole, sidecars too", "[engine]") {
    test::TemporaryFolder folder;
    make_set(folder.path(), {"a.tif", "b.tif"}, "old");
    std::ofstream(folder.path() / "a.tif.aux.xml") << "stale";
    std::ofstream(folder.path() / "mine.txt") << "not ours";
    make_set(folder.path(), {"a.tif"}, "new");
    CHECK(content(folder.path() / "a.tif") == "new");
    CHECK_FALSE(fs::exists(folder.path() / "b.tif"));
    CHECK_FALSE(fs::exists(folder.path() / "a.tif.aux.xml"));
    CHECK(fs::exists(folder.path() / "mine.txt"));
}

TEST_CASE("OutputSet: a link at a final name is replaced, its target is not touched",
          "[engine][edge]") {
    test::TemporaryFolder folder;
    std::ofstream(folder.path() / "victim") << "precious";
    fs::create_directory(folder.path() / "out");
    fs::create_symlink(folder.path() / "victim", folder.path() / "out/a.tif");
    make_set(folder.path() / "out", {"a.tif"}, "new");
    CHECK(content(folder.path() / "victim") == "precious");
    CHECK_FALSE(fs::is_symlink(folder.path() / "out/a.tif"));
}

TEST_CASE("OutputSet: a second run in the folder is refused and told who is there",
          "[engine][edge]") {
    test::TemporaryFolder folder;
    OutputSet first(folder.path(), OutputSet::Mark::checksums);
    try {
        OutputSet second(folder.path(), OutputSet::Mark::checksums);
        FAIL("two runs hold one folder");
    } catch (const Error& error) {
        CHECK(error.cause() == Cause::output);
        CHECK_THAT(error.what(), Catch::Contains("process " + std::to_string(getpid())));
    }
}

TEST_CASE("OutputSet: the leftovers of a killed run are cleared away", "[engine][edge]") {
    test::TemporaryFolder folder;
    const pid_t child = fork();
    if (child == 0) {
        OutputSet set(folder.path(), OutputSet::Mark::checksums);
        write_text_file(set.staged("a.tif"), "half");
        _exit(0);  // no destructor runs, as under kill -9
    }
    waitpid(child, nullptr, 0);
    CHECK(entries(folder.path()) == 2);
    make_set(folder.path(), {"b.tif"}, "x");
    CHECK(entries(folder.path()) == 2);  // b.tif and SHA256SUMS
}

TEST_CASE("OutputSet: a folder that cannot be made is an output error", "[engine][edge]") {
    test::TemporaryFolder folder;
    std::ofstream(folder.path() / "file") << "x";
    CHECK_THROWS_AS(OutputSet(folder.path() / "file/out", OutputSet::Mark::checksums), Error);
}

TEST_CASE("complete_set: a missing file or list makes a set incomplete", "[engine][edge]") {
    test::TemporaryFolder folder;
    make_set(folder.path(), {"a.tif", "b.tif"}, "x");
    fs::remove(folder.path() / "b.tif");
    CHECK(complete_set(folder.path()).empty());
}
