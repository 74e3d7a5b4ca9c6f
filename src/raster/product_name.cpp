#include <algorithm>
#include <array>
#include <cstddef>
#include <span>

#include "product_facts.hpp"
#include "sunbudget/base/text.hpp"

namespace sunbudget {
namespace {

using Words = std::span<const std::string>;

/// Letters stand for themselves; 9 is any digit, A any letter, * either, ? any of "COTEM" (which of
/// Landsat's instruments).
bool fits(std::string_view word, std::string_view form) {
    const auto is_digit = [](char c) { return c >= '0' && c <= '9'; };
    const auto is_letter = [](char c) { return c >= 'A' && c <= 'Z'; };
    return std::equal(word.begin(), word.end(), form.begin(), form.end(), [&](char c, char f) {
        if (f == '9') return is_digit(c);
        if (f == 'A') return is_letter(c);
        if (f == '*') return is_digit(c) || is_letter(c);
        if (f == '?') return std::string_view("COTEM").find(c) != std::string_view::npos;
        return c == f;
    });
}

bool fit_all(Words words, std::span<const std::string_view> forms) {
    return words.size() >= forms.size() &&
           std::equal(forms.begin(), forms.end(), words.begin(),
                      [](auto form, const auto& word) { return fits(word, form); });
}

int number(std::string_view digits) {
    return static_cast<int>(parse_integer(digits).value_or(0));
}

std::optional<CivilDate> date_of(std::string_view digits) {
    const CivilDate date{number(digits.substr(0, 4)), number(digits.substr(4, 2)),
                         number(digits.substr(6, 2))};
    return is_valid(date) ? std::optional(date) : std::nullopt;
}

/// 2015230: year and day of the year.
std::optional<CivilDate> date_of_day(std::string_view digits) {
    const int day = number(digits.substr(4));
    if (day < 1 || day > 366) return std::nullopt;
    return civil_from_days(days_from_civil({number(digits.substr(0, 4)), 1, 1}) + day - 1);
}

bool is_band(std::string_view word) {
    return fits(word, "B9") || fits(word, "B99");
}

/// The number of a band in the names that were used for surface reflectance made on demand.
bool is_numbered_band(std::string_view word) {
    return fits(word, "BAND9") || fits(word, "BAND99");
}

struct FileKind {
    ProductLevel level;
    std::string band;
    bool on_demand = false;  // encoded otherwise than any collection's own Level-2
};

/// What follows a Landsat product's identifier in a file's name; nothing when that is no band.
std::optional<FileKind> kind_of_landsat_file(Words rest, bool level2) {
    if (rest.empty()) return std::nullopt;
    const std::string second = rest.size() > 1 ? rest[1] : "";
    const std::string third = rest.size() > 2 ? rest[2] : "";
    const std::string pair = rest[0] + "_" + second;
    if (rest[0] == "SR" && is_band(second))
        return FileKind{ProductLevel::surface_reflectance, pair};
    if (rest[0] == "SR" && is_numbered_band(second))
        return FileKind{ProductLevel::surface_reflectance, pair, true};
    if (rest[0] == "TOA") return FileKind{ProductLevel::level1, pair, true};
    if (rest[0] == "SR" && !second.empty())
        return FileKind{ProductLevel::auxiliary, third.empty() ? pair : pair + "_" + third};
    if (rest[0] == "ST" || rest[0] == "BT")
        return FileKind{ProductLevel::surface_temperature, pair};
    if (rest[0] == "QA" || second == "QA") return FileKind{ProductLevel::auxiliary, pair};
    constexpr std::array<std::string_view, 5> single{"BQA", "VAA", "VZA", "SAA", "SZA"};
    if (std::find(single.begin(), single.end(), rest[0]) != single.end())
        return FileKind{ProductLevel::auxiliary, rest[0]};
    if (is_band(rest[0]) && !level2) return FileKind{ProductLevel::level1, rest[0]};
    return std::nullopt;
}

void add_kind(ProductFacts& facts, Words rest, bool level2) {
    const auto kind = kind_of_landsat_file(rest, level2);
    if (!kind) return;
    facts.level = kind->level;
    facts.band = kind->band;
    if (kind->on_demand) facts.sensor.clear();
}

std::string landsat_sensor(std::string_view platform, int collection) {
    if (collection != 2) return {};
    const char number = platform[3], instrument = platform[1];
    if (number >= '8') return instrument == 'C' || instrument == 'O' ? "landsat-oli-c2" : "";
    return number >= '4' && instrument != 'M' ? "landsat-tm-c2" : "";
}

/// LC08_L2SP_005009_20150710_20200908_02_T2
constexpr std::array<std::string_view, 7> collection_form{"L?09",     "L9**", "999999", "99999999",
                                                          "99999999", "99",   "**"};

std::optional<ProductFacts> collection_facts(Words words) {
    if (!fit_all(words, collection_form)) return std::nullopt;
    ProductFacts facts;
    const bool level2 = words[1][1] == '2';
    facts.level = level2 ? ProductLevel::surface_reflectance : ProductLevel::level1;
    facts.id = joined(words.first(collection_form.size()), "_");
    facts.platform = std::string("Landsat ") + words[0][3];
    facts.collection = number(words[5]);
    if (level2) facts.sensor = landsat_sensor(words[0], facts.collection);
    facts.date = date_of(words[3]);
    add_kind(facts, words.subspan(collection_form.size()), level2);
    return facts;
}

/// LC80380342015230LGN00: before there were collections.
std::optional<ProductFacts> early_facts(Words words) {
    if (words.empty() || !fits(words[0], "L?99999999999999AAA99")) return std::nullopt;
    ProductFacts facts;
    facts.level = ProductLevel::level1;
    facts.id = words[0];
    facts.platform = std::string("Landsat ") + words[0][2];
    facts.date = date_of_day(std::string_view(words[0]).substr(9, 7));
    add_kind(facts, words.subspan(1), false);
    return facts;
}

std::optional<UtcSeconds> instant_of(std::string_view stamp) {
    const auto date = date_of(stamp);
    const int hour = number(stamp.substr(9, 2)), minute = number(stamp.substr(11, 2));
    const int second = number(stamp.substr(13, 2));
    if (!date || hour > 23 || minute > 59 || second > 59) return std::nullopt;
    return static_cast<double>(days_from_civil(*date)) * 86400.0 + hour * 3600.0 + minute * 60.0 +
           second;
}

/// T29UNU_20221005T115411_B02_60m: the resolution is part of Level-2A names only.
std::optional<ProductFacts> sentinel_facts(Words words) {
    constexpr std::array<std::string_view, 2> form{"T99AAA", "99999999T999999"};
    if (!fit_all(words, form) || words.size() < 3) return std::nullopt;
    ProductFacts facts;
    facts.platform = "Sentinel-2";
    facts.id = words[0] + "_" + words[1];
    facts.utc = instant_of(words[1]);
    facts.date = date_of(words[1]);
    const bool is_reflectance = fits(words[2], "B99") || fits(words[2], "B9A");
    const bool level2 = words.size() > 3 && fits(words[3], "99M");
    facts.band = words[2];
    if (level2 && is_reflectance) facts.sensor = "sentinel2-l2a";
    if (!is_reflectance)
        facts.level = ProductLevel::auxiliary;
    else if (level2)
        facts.level = ProductLevel::surface_reflectance;
    else if (words.size() == 3)
        facts.level = ProductLevel::level1;
    return facts;
}

/// S2A_MSIL2A_20221005T115411_N0400_R023_T29UNU_20221005T164454
std::optional<ProductFacts> sentinel_product_facts(Words words) {
    constexpr std::array<std::string_view, 6> form{"S2A",   "MSIL9A", "99999999T999999",
                                                   "N9999", "R999",   "T99AAA"};
    if (!fit_all(words, form)) return std::nullopt;
    ProductFacts facts;
    facts.platform = "Sentinel-2";
    facts.id = words[5] + "_" + words[2];
    facts.utc = instant_of(words[2]);
    facts.date = date_of(words[2]);
    const bool level2 = words[1] == "MSIL2A";
    facts.level = level2 ? ProductLevel::surface_reflectance : ProductLevel::level1;
    if (level2) facts.sensor = "sentinel2-l2a";
    return facts;
}

}  // namespace

std::optional<ProductFacts> facts_of_name(std::string_view file_name) {
    std::string upper(file_name.substr(0, file_name.find('.')));
    for (auto& c : upper)
        if (c >= 'a' && c <= 'z') c = static_cast<char>(c - 'a' + 'A');
    const auto words = split(upper, '_');
    for (std::size_t first = 0; first < words.size(); ++first) {
        const Words rest = Words(words).subspan(first);
        for (const auto form :
             {collection_facts, early_facts, sentinel_facts, sentinel_product_facts})
            if (auto facts = form(rest)) return facts;
    }
    return std::nullopt;
}

std::optional<ProductFacts> facts_of_id(std::string_view id) {
    return facts_of_name(id);
}

}  // namespace sunbudget
