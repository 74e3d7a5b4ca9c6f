#include "mtl.hpp"

#include <nlohmann/json.hpp>
#include <vector>

#include "sunbudget/base/error.hpp"
#include "sunbudget/base/text.hpp"

namespace sunbudget {
namespace {

constexpr std::size_t deepest_group = 8;  // real files have two levels

[[noreturn]] void refuse(const std::string& what, const std::string& where) {
    throw Error(Cause::input, what, where, "fetch the scene's metadata file again");
}

bool is_root(const std::string& group) {
    return group.ends_with("_METADATA_FILE");
}

std::string unquoted(std::string_view value) {
    if (value.size() >= 2 && value.front() == '"' && value.back() == '"')
        value = value.substr(1, value.size() - 2);
    return std::string(value);
}

/// Reads one line after the other and keeps the open groups.
class TextReader {
  public:
    explicit TextReader(Mtl& mtl) : mtl_(mtl) {}

    /// False at the END line.
    bool take(std::string_view line) {
        ++line_;
        line = trimmed(line);
        if (line.empty()) return true;
        if (line == "END") return false;
        const auto equals = line.find('=');
        if (equals == std::string_view::npos) fail("no \"KEY = VALUE\"");
        take_pair(std::string(trimmed(line.substr(0, equals))),
                  unquoted(trimmed(line.substr(equals + 1))));
        return true;
    }
    void finish() const {
        if (line_ == 0 || !rooted_) refuse("not a Landsat metadata file", mtl_.where());
        if (!open_.empty())
            refuse("the metadata file is cut short: group " + open_.back() + " has no end",
                   mtl_.where());
    }

  private:
    void take_pair(const std::string& key, const std::string& value) {
        if (key == "GROUP") {
            if (!rooted_ && !is_root(value)) fail("not a Landsat metadata file");
            rooted_ = true;
            open_.push_back(value);
            if (open_.size() > deepest_group) fail("groups in groups without end");
        } else if (key == "END_GROUP") {
            if (open_.empty() || open_.back() != value) fail("the group that ends is not open");
            open_.pop_back();
        } else {
            if (open_.empty()) fail("not a Landsat metadata file");
            mtl_.add(open_.back(), key, value);
        }
    }
    [[noreturn]] void fail(const std::string& what) const {
        refuse(what, mtl_.where() + ", line " + std::to_string(line_));
    }

    Mtl& mtl_;
    std::vector<std::string> open_;
    bool rooted_ = false;
    long line_ = 0;
};

using nlohmann::json;

void add_members(Mtl& mtl, const std::string& group, const json& object, std::size_t depth) {
    if (depth > deepest_group) refuse("groups in groups without end", mtl.where());
    for (const auto& [key, value] : object.items()) {
        if (value.is_object())
            add_members(mtl, key, value, depth + 1);
        else if (value.is_string())
            mtl.add(group, key, value.get<std::string>());
        else if (value.is_number())
            mtl.add(group, key, value.dump());
    }
}

}  // namespace

Mtl Mtl::from_text(const std::string& text, const std::string& where) {
    Mtl mtl(where);
    TextReader reader(mtl);
    std::string_view rest(text);
    while (!rest.empty()) {
        const auto end = rest.find('\n');
        if (!reader.take(rest.substr(0, end)) || end == std::string_view::npos) break;
        rest.remove_prefix(end + 1);
    }
    reader.finish();
    return mtl;
}

Mtl Mtl::from_json(const std::string& text, const std::string& where) {
    const auto root = json::parse(text, nullptr, false);
    if (root.is_discarded()) refuse("the metadata file is no JSON, or cut short", where);
    if (!root.is_object() || root.size() != 1 || !is_root(root.begin().key()) ||
        !root.begin()->is_object())
        refuse("not a Landsat metadata file", where);
    Mtl mtl(where);
    add_members(mtl, root.begin().key(), *root.begin(), 1);
    return mtl;
}

void Mtl::add(const std::string& group, const std::string& key, const std::string& value) {
    const auto [place, is_new] = groups_[group].emplace(key, value);
    if (!is_new && place->second != value)
        refuse(key + " is said to be both \"" + place->second + "\" and \"" + value + "\"", where_);
}

std::optional<std::string> Mtl::text(const std::string& group, const std::string& key) const {
    const auto found = groups_.find(group);
    if (found == groups_.end()) return std::nullopt;
    const auto value = found->second.find(key);
    return value == found->second.end() ? std::nullopt : std::optional(value->second);
}

std::optional<double> Mtl::number(const std::string& group, const std::string& key) const {
    const auto written = text(group, key);
    if (!written) return std::nullopt;
    const auto value = parse_number(*written);
    if (!value) refuse(key + " is \"" + *written + "\", not a number", where_);
    return value;
}

}  // namespace sunbudget
