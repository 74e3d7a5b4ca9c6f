#include "sunbudget/base/digest.hpp"

#include <catch2/catch.hpp>
#include <fstream>

#include "sunbudget/base/error.hpp"
#include "support/vectors.hpp"

using namespace sunbudget;

TEST_CASE("sha256: agrees with the standard's own example", "[base][vector]") {
    // FIPS 180-4 example "abc", as printed in the NIST example values file (from memory; sha256sum agrees).
    CHECK(sha256_of("abc") == "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad");
}

TEST_CASE("input_digest: whole file when small, sampled when large, refused when missing",
          "[base]") {
    test::TemporaryFolder folder;
    const auto small = folder.path() / "small";
    std::ofstream(small) << "abc";
    CHECK(input_digest(small) == "sha256:" + sha256_of("abc"));

    const auto large = folder.path() / "large";
    std::ofstream(large) << "x";
    std::filesystem::resize_file(large, 70'000'000);
    const auto before = input_digest(large);
    CHECK(before.starts_with("sampled-sha256:"));
    std::fstream(large, std::ios::in | std::ios::out).seekp(69'999'999).write("y", 1);
    CHECK(input_digest(large) != before);

    CHECK_THROWS_AS(input_digest(folder.path() / "none"), Error);
}
