#pragma once

#include <map>
#include <optional>
#include <string>

namespace sunbudget {

/// A Landsat metadata file: values by the name of the innermost group and the key, without quotes.
/// The same key stands in several groups with different meanings (REFLECTANCE_MULT_BAND_2 of the
/// Level-1 and of the Level-2 numbers), so there is no search across groups.
class Mtl {
  public:
    /// Text as in ..._MTL.txt: GROUP = NAME, KEY = VALUE, END_GROUP = NAME, END.
    /// Throws Error(input) naming the line.
    [[nodiscard]] static Mtl from_text(const std::string& text, const std::string& where);
    /// The same as JSON objects. Throws Error(input).
    [[nodiscard]] static Mtl from_json(const std::string& text, const std::string& where);

    [[nodiscard]] std::optional<std::string> text(const std::string& group,
                                                  const std::string& key) const;
    /// Throws Error(input) when the value is no number.
    [[nodiscard]] std::optional<double> number(const std::string& group,
                                               const std::string& key) const;
    [[nodiscard]] const std::string& where() const noexcept { return where_; }

    void add(const std::string& group, const std::string& key, const std::string& value);

  private:
    explicit Mtl(std::string where) : where_(std::move(where)) {}
    std::string where_;
    std::map<std::string, std::map<std::string, std::string>> groups_;
};

}  // namespace sunbudget
