#include "html.hpp"

#include <algorithm>
#include <cassert>
#include <cstdint>

#include "report_files.hpp"

namespace sunbudget {

namespace {

constexpr std::string_view replacement = "\xEF\xBF\xBD";

/// Bytes of the UTF-8 character that a text begins with; 0 where it is none.
/// source  the Unicode Standard, table 3-7
std::size_t character_bytes(std::string_view text) {
    const auto byte = [&](std::size_t i) { return static_cast<std::uint8_t>(text[i]); };
    const auto follows = [&](std::size_t i, int low = 0x80, int high = 0xBF) {
        return i < text.size() && byte(i) >= low && byte(i) <= high;
    };
    const int first = byte(0);
    if (first < 0x80) return 1;
    if (first >= 0xC2 && first <= 0xDF) return follows(1) ? 2 : 0;
    if (first >= 0xE0 && first <= 0xEF)
        return follows(1, first == 0xE0 ? 0xA0 : 0x80, first == 0xED ? 0x9F : 0xBF) && follows(2)
                   ? 3
                   : 0;
    if (first >= 0xF0 && first <= 0xF4)
        return follows(1, first == 0xF0 ? 0x90 : 0x80, first == 0xF4 ? 0x8F : 0xBF) && follows(2) &&
                       follows(3)
                   ? 4
                   : 0;
    return 0;
}

/// Characters that turn text around: a name could look like another one.
bool turns_text(std::string_view character) {
    return character >= "\xE2\x80\xAA" && character <= "\xE2\x80\xAE"
               ? true
               : character >= "\xE2\x81\xA6" && character <= "\xE2\x81\xA9";
}

std::string_view harmless(std::string_view character) {
    switch (character.front()) {
        case '&':
            return "&amp;";
        case '<':
            return "&lt;";
        case '>':
            return "&gt;";
        case '"':
            return "&quot;";
        case '\'':
            return "&#39;";
        default:
            break;
    }
    const auto code = static_cast<std::uint8_t>(character.front());
    const bool control = code < 0x20 || code == 0x7F ||
                         (code == 0xC2 && static_cast<std::uint8_t>(character[1]) < 0xA0);
    return control || turns_text(character) ? replacement : character;
}

}  // namespace

std::string escaped(std::string_view text) {
    std::string safe;
    while (!text.empty()) {
        const auto bytes = character_bytes(text);
        safe += bytes == 0 ? replacement : harmless(text.substr(0, bytes));
        text.remove_prefix(std::max<std::size_t>(1, bytes));
    }
    return safe;
}

std::string base64(std::span<const std::byte> bytes) {
    constexpr std::string_view digits =
        "ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789+/";
    std::string text;
    text.reserve((bytes.size() + 2) / 3 * 4);
    for (std::size_t i = 0; i < bytes.size(); i += 3) {
        const std::size_t count = std::min<std::size_t>(3, bytes.size() - i);
        std::uint32_t three = 0;
        for (std::size_t k = 0; k < 3; ++k)
            three = three << 8 | (k < count ? std::to_integer<std::uint32_t>(bytes[i + k]) : 0);
        for (std::size_t k = 0; k < 4; ++k)
            text += k <= count ? digits[three >> (18 - 6 * k) & 63] : '=';
    }
    return text;
}

std::string_view report_file(std::string_view name) {
    const auto files = report_files();
    const auto found = std::ranges::find(files, name, &EmbeddedFile::name);
    assert(found != files.end());
    return found->text;
}

std::string filled(std::string_view text,
                   const std::vector<std::pair<std::string, std::string>>& values) {
    std::string whole;
    for (auto mark = text.find("{{"); mark != text.npos; mark = text.find("{{")) {
        const auto end = text.find("}}", mark);
        const auto found = std::ranges::find(values, text.substr(mark + 2, end - mark - 2),
                                             &std::pair<std::string, std::string>::first);
        assert(found != values.end());
        whole += text.substr(0, mark);
        whole += found->second;
        text.remove_prefix(end + 2);
    }
    return whole += text;
}

}  // namespace sunbudget
