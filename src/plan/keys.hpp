#pragma once

#include <optional>
#include <string>
#include <string_view>
#include <vector>

namespace sunbudget {

/// The kinds of values a key may take. All of them are recognised from the text of the value.
enum class ValueKind {
    map,
    list,
    text,
    choice,
    path,    ///< of a file or folder
    raster,  ///< PATH, PATH:N or PATH:NAME
    number,
    integer,
    boolean,      ///< true or false, without quotes
    length,       ///< "250 m", "20 km", "800 ft"
    duration,     ///< "10 min", "1 h", "30 s"
    temperature,  ///< "25 degC", "298 K"
    difference,   ///< of two temperatures: "4 K"
    pressure,     ///< "14 hPa", "1.4 kPa"
    lapse,        ///< "6.5 K/km"
    speed,        ///< "3.4 m/s", "12 km/h", "7 kn"
    date,
    instant,
    hours,  ///< "12-17", "6:30-18:30"
    zone,
};

/// What holds between the keys of one map. Words and schema are made from it.
struct Rule {
    enum class Type {
        exactly_one,  ///< of `keys`
        at_most_one,  ///< of `keys`
        needs,        ///< `keys[0]` may only stand beside all the others
    };
    Type type;
    std::vector<std::string> keys;
};

struct Key;

/// One way to write a value.
struct Form {
    ValueKind kind = ValueKind::text;
    std::vector<std::string> choices{};  ///< of a choice; of an integer that has but a few
    /// Bounds of a number, an integer, a length in m, a duration in s, a temperature or a difference in K, a
    /// pressure in hPa, a lapse in K/km, a speed in m/s; the count of a list.
    std::optional<double> min{};
    std::optional<double> max{};
    bool above_min = false;     ///< `min` itself is not allowed
    bool distinct = false;      ///< no item of a list twice
    bool beside_names = false;  ///< a path that stands beside choices: has a dot or a slash
    std::vector<Key> keys{};    ///< of a map
    std::vector<Rule> rules{};  ///< of a map
    std::vector<Form> items{};  ///< the forms an item of a list may take
};

/// One row of the table that the parser, the schema, the help and the messages are made from.
struct Key {
    std::string name;
    std::vector<Form> forms;     ///< more than one where a value may be written in several ways
    std::string doc;             ///< one line, with the unit where the value has none of its own
    std::string default_text{};  ///< as it would be written; empty: no default
    bool required = false;
};

/// The whole plan as one map.
[[nodiscard]] const Form& plan_form();
/// The row of a key path: `plan_key("sky.turbidity")`, which must exist.
[[nodiscard]] const Key& plan_key(std::string_view path);

/// "a number from 1 to 9", "surface, elevation or a path": for messages, schema and help.
[[nodiscard]] std::string expected(const Form& form);
[[nodiscard]] std::string expected(const std::vector<Form>& forms);
[[nodiscard]] std::vector<std::string> names_of(const std::vector<Key>& keys);

}  // namespace sunbudget
