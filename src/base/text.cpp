#include "sunbudget/base/text.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <array>
#include <charconv>
#include <cmath>
#include <limits>
#include <numeric>

namespace sunbudget {

std::optional<double> parse_number(std::string_view text) noexcept {
    if (text.starts_with('+')) text.remove_prefix(1);
    if (text.empty() || text.starts_with('+')) return std::nullopt;
    double value = 0;
    const auto* end = text.data() + text.size();
    const auto [stop, error] = std::from_chars(text.data(), end, value);
    if (error != std::errc{} || stop != end || !std::isfinite(value)) return std::nullopt;
    return value;
}

std::optional<std::int64_t> parse_integer(std::string_view text) noexcept {
    std::int64_t value = 0;
    const auto* end = text.data() + text.size();
    const auto [stop, error] = std::from_chars(text.data(), end, value);
    if (error != std::errc{} || stop != end) return std::nullopt;
    return value;
}

std::optional<std::uint64_t> parse_bytes(std::string_view text) noexcept {
    constexpr std::string_view units = "KMGT";
    std::uint64_t factor = 1;
    if (!text.empty()) {
        const auto unit = units.find(text.back());
        if (unit != std::string_view::npos) {
            factor = std::uint64_t{1} << (10 * (unit + 1));
            text.remove_suffix(1);
        }
    }
    const auto number = parse_number(text);
    if (!number || *number < 0) return std::nullopt;
    const double bytes = *number * static_cast<double>(factor);
    if (bytes > 1e18) return std::nullopt;
    return static_cast<std::uint64_t>(bytes);
}

std::string shortest(double value) {
    return fmt::format("{}", value);
}

std::string human_bytes(double bytes) {
    constexpr std::array names{"bytes", "kB", "MB", "GB", "TB"};
    std::size_t unit = 0;
    while (bytes >= 999.5 && unit + 1 < names.size()) {
        bytes /= 1000;
        ++unit;
    }
    const int digits = bytes < 9.95 && unit > 0 ? 1 : 0;
    return fmt::format("{:.{}f} {}", bytes, digits, names[unit]);
}

namespace {
/// Edits (insert, delete, replace, swap of neighbours) from one name to the other.
std::size_t edit_distance(std::string_view a, std::string_view b) {
    std::vector<std::size_t> before(b.size() + 1), last(b.size() + 1), now(b.size() + 1);
    std::iota(last.begin(), last.end(), std::size_t{0});
    for (std::size_t i = 1; i <= a.size(); ++i) {
        now[0] = i;
        for (std::size_t j = 1; j <= b.size(); ++j) {
            const std::size_t differs = a[i - 1] == b[j - 1] ? 0 : 1;
            now[j] = std::min({last[j] + 1, now[j - 1] + 1, last[j - 1] + differs});
            if (i > 1 && j > 1 && a[i - 1] == b[j - 2] && a[i - 2] == b[j - 1])
                now[j] = std::min(now[j], before[j - 2] + 1);
        }
        std::swap(before, last);
        std::swap(last, now);
    }
    return last[b.size()];
}
}  // namespace

std::optional<std::string> nearest_name(std::string_view name,
                                        std::span<const std::string> candidates) {
    const std::string wanted = lower_case(name);
    std::size_t best = std::numeric_limits<std::size_t>::max();
    const std::string* found = nullptr;
    for (const auto& candidate : candidates) {
        const auto distance = edit_distance(wanted, lower_case(candidate));
        if (distance < best) {
            best = distance;
            found = &candidate;
        }
    }
    // A third of the letters may be wrong; more than that is another word, and so is another letter.
    const bool is_near = best <= wanted.size() / 3 || (best == 1 && wanted.size() > 1);
    if (found == nullptr || !is_near) return std::nullopt;
    return *found;
}

std::string suggestion(std::string_view name, std::span<const std::string> candidates) {
    if (const auto near = nearest_name(name, candidates)) return "did you mean \"" + *near + "\"?";
    return "known here: " + joined(candidates, ", ");
}

std::string_view trimmed(std::string_view text) noexcept {
    constexpr std::string_view blank = " \t\r\n";
    const auto first = text.find_first_not_of(blank);
    if (first == std::string_view::npos) return {};
    return text.substr(first, text.find_last_not_of(blank) - first + 1);
}

std::vector<std::string> split(std::string_view text, char separator) {
    std::vector<std::string> parts;
    for (std::size_t begin = 0;;) {
        const auto end = text.find(separator, begin);
        parts.emplace_back(text.substr(begin, end - begin));
        if (end == std::string_view::npos) return parts;
        begin = end + 1;
    }
}

std::string joined(std::span<const std::string> parts, std::string_view separator) {
    std::string text;
    for (std::size_t i = 0; i < parts.size(); ++i) {
        if (i > 0) text += separator;
        text += parts[i];
    }
    return text;
}

std::string lower_case(std::string_view text) {
    std::string lower(text);
    for (auto& c : lower)
        if (c >= 'A' && c <= 'Z') c = static_cast<char>(c - 'A' + 'a');
    return lower;
}

std::string printable(std::string_view text) {
    std::string clean;
    for (const char c : text) {
        const auto byte = static_cast<unsigned char>(c);
        if (byte < 0x20 || byte == 0x7f)
            clean += fmt::format("\\x{:02x}", byte);
        else
            clean += c;
    }
    return clean;
}

}  // namespace sunbudget
