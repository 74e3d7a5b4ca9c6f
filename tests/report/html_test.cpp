// Text of others made harmless, and bytes as text.
#include <catch2/catch.hpp>

#include <random>

#include "html.hpp"

using namespace sunbudget;

namespace {
int replaced(const std::string& text) {
    int count = 0;
    for (auto at = text.find("\xEF\xBF\xBD"); at != std::string::npos;
         at = text.find("\xEF\xBF\xBD", at + 3))
        ++count;
    return count;
}
std::string coded(const std::string& text) {
    return base64(std::as_bytes(std::span(text)));
}
}  // namespace

TEST_CASE("base64: agrees with the test vectors of RFC 4648", "[report][vector]") {
    // RFC 4648, section 10.
    CHECK(coded("") == "");
    CHECK(coded("f") == "Zg==");
    CHECK(coded("fo") == "Zm8=");
    CHECK(coded("foo") == "Zm9v");
    CHECK(coded("foob") == "Zm9vYg==");
    CHECK(coded("fooba") == "Zm9vYmE=");
    CHECK(coded("foobar") == "Zm9vYmFy");
}

TEST_CASE("escaped: markup, control characters and broken UTF-8 lose their power, all else stays",
          "[report][edge]") {
    const std::string broken = "\xEF\xBF\xBD";
    CHECK(escaped("<b>&\"'") == "&lt;b&gt;&amp;&quot;&#39;");
    CHECK(escaped("Gr\xC3\xBC\xC3\x9F"
                  "e \xE2\x82\xAC \xF0\x9F\x8C\x9E") ==
          "Gr\xC3\xBC\xC3\x9F"
          "e \xE2\x82\xAC \xF0\x9F\x8C\x9E");
    CHECK(escaped("a\nb\x7f") == "a" + broken + "b" + broken);
    CHECK(escaped("\xC0\xBC") == broken + broken);               // an overlong "<"
    CHECK(escaped("\xED\xA0\x80") == broken + broken + broken);  // half of a surrogate pair
    CHECK(escaped("\xF4\x90\x80\x80").find('\xF4') == std::string::npos);
    CHECK(escaped("a\xE2\x82") == "a" + broken + broken);
    CHECK(escaped("x\xE2\x80\xAE"
                  "gpj.y") == "x" + broken + "gpj.y");  // turns the text round
    CHECK(escaped(std::string("\0", 1)) == broken);
}

TEST_CASE("escaped: no bytes whatever leave a sign that opens a tag or an attribute",
          "[report][property]") {
    std::mt19937 random(1);
    for (int i = 0; i < 2000; ++i) {
        std::string bytes(20, '\0');
        for (auto& byte : bytes) byte = static_cast<char>(random());
        const auto safe = escaped(bytes);
        CHECK(safe.find_first_of("<>\"'") == std::string::npos);
        CHECK(replaced(escaped(safe)) == replaced(safe));  // what came out is good UTF-8
    }
}
