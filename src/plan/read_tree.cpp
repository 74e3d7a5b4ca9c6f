#include <yaml-cpp/eventhandler.h>
#include <yaml-cpp/exceptions.h>
#include <yaml-cpp/parser.h>

#include <algorithm>
#include <sstream>

#include "tree.hpp"

namespace sunbudget {

namespace {

constexpr std::size_t most_bytes = std::size_t{1} << 20;
constexpr std::size_t most_nodes = 100'000;
constexpr std::size_t most_keys = 1000;
constexpr std::size_t most_levels = 32;

[[noreturn]] void stop(const std::string& file, int line, std::string what, std::string todo = {}) {
    throw Error(Cause::usage, std::move(what), Place{file, line, {}}.text(), std::move(todo));
}

// Length of the UTF-8 sequence at the front of `text`; 0 where there is none (overlong forms,
// surrogates and values beyond U+10FFFF are none).
std::size_t utf8_length(std::string_view text) {
    const auto byte = [&](std::size_t i) { return static_cast<unsigned char>(text[i]); };
    const unsigned first = byte(0);
    if (first < 0x80) return 1;
    const std::size_t length = first >= 0xf0 ? 4 : first >= 0xe0 ? 3 : 2;
    if (first < 0xc2 || first > 0xf4 || text.size() < length) return 0;
    for (std::size_t i = 1; i < length; ++i)
        if ((byte(i) & 0xc0u) != 0x80) return 0;
    const unsigned second = byte(1);
    const bool wrong = (first == 0xe0 && second < 0xa0) || (first == 0xed && second > 0x9f) ||
                       (first == 0xf0 && second < 0x90) || (first == 0xf4 && second > 0x8f);
    return wrong ? 0 : length;
}

bool is_control(char c) {
    const auto byte = static_cast<unsigned char>(c);
    return (byte < 0x20 && c != '\n' && c != '\r' && c != '\t') || byte == 0x7f;
}

void check_bytes(const std::string& file, std::string_view text) {
    int line = 1;
    for (std::size_t at = 0; at < text.size();) {
        const auto length = utf8_length(text.substr(at));
        if (length == 0) stop(file, line, "the plan is not UTF-8 text", "save it as UTF-8");
        if (is_control(text[at])) stop(file, line, "the plan has a control character", "remove it");
        if (text[at] == '\n') ++line;
        at += length;
    }
}

// yaml-cpp 0.7 takes a quoted text whose closing quote is missing, to the end of the file.
bool is_closed(std::string_view quoted) {
    const char quote = quoted.front();
    for (std::size_t i = 1; i < quoted.size(); ++i) {
        if (quote == '"' && quoted[i] == '\\')
            ++i;
        else if (quoted[i] == quote) {
            if (quote != '\'' || i + 1 >= quoted.size() || quoted[i + 1] != quote) return true;
            ++i;
        }
    }
    return false;
}

/// Builds the tree from the parser's events, so that what is refused is never built.
class Builder : public YAML::EventHandler {
  public:
    Builder(const std::string& file, std::string_view text, Mistakes& mistakes)
        : file_(file), text_(text), mistakes_(mistakes) {}

    void OnDocumentStart(const YAML::Mark& mark) override {
        if (++documents_ > 1)
            stop(file_, mark.line + 1, "a second document starts here",
                 "a plan file holds one plan; remove the line \"---\" and what follows");
    }
    void OnDocumentEnd() override {}
    void OnNull(const YAML::Mark& mark, YAML::anchor_t anchor) override {
        refuse_anchor(mark, anchor);
        put(mark, Node::Shape::nothing);
    }
    void OnAlias(const YAML::Mark& mark, YAML::anchor_t) override {
        refuse(mark, "an alias", "write the value out");
        put(mark, Node::Shape::nothing);
        if (!open_.empty()) open_.back().node.children.back().bad = true;
    }
    void OnScalar(const YAML::Mark& mark, const std::string& tag, YAML::anchor_t anchor,
                  const std::string& value) override;
    void OnSequenceStart(const YAML::Mark& mark, const std::string& tag, YAML::anchor_t anchor,
                         YAML::EmitterStyle::value) override {
        open(mark, tag, anchor, Node::Shape::list);
    }
    void OnSequenceEnd() override { close(); }
    void OnMapStart(const YAML::Mark& mark, const std::string& tag, YAML::anchor_t anchor,
                    YAML::EmitterStyle::value) override {
        open(mark, tag, anchor, Node::Shape::map);
    }
    void OnMapEnd() override { close(); }

    [[nodiscard]] int documents() const { return documents_; }
    [[nodiscard]] Node take() { return std::move(root_); }

  private:
    struct Level {
        Node node;
        std::string key;
        bool has_key = false;
        int key_line = 0;
    };

    [[nodiscard]] bool wants_key() const {
        return !open_.empty() && open_.back().node.shape == Node::Shape::map &&
               !open_.back().has_key;
    }
    [[nodiscard]] Place next_place(const YAML::Mark& mark) const;
    void put(const YAML::Mark& mark, Node::Shape shape, std::string text = {}, bool quoted = false);
    void attach(Node node);
    void name(const YAML::Mark& mark, std::string key);
    void open(const YAML::Mark& mark, const std::string& tag, YAML::anchor_t anchor,
              Node::Shape shape);
    void close();
    void refuse(const YAML::Mark& mark, const std::string& what, const std::string& todo);
    void refuse_anchor(const YAML::Mark& mark, YAML::anchor_t anchor);

    const std::string& file_;
    std::string_view text_;
    Mistakes& mistakes_;
    std::vector<Level> open_;
    Node root_;
    std::size_t nodes_ = 0;
    int documents_ = 0;
};

// Where the next value belongs: the line of its key, the place in its list.
Place Builder::next_place(const YAML::Mark& mark) const {
    if (open_.empty()) return {file_, mark.line + 1, {}};
    const auto& level = open_.back();
    const auto& above = level.node.place.key;
    if (level.node.shape == Node::Shape::list)
        return {file_, mark.line + 1,
                above + "[" + std::to_string(level.node.children.size() + 1) + "]"};
    return {file_, level.key_line, above.empty() ? level.key : above + "." + level.key};
}

void Builder::put(const YAML::Mark& mark, Node::Shape shape, std::string text, bool quoted) {
    if (++nodes_ > most_nodes) stop(file_, mark.line + 1, "the plan has more than 100,000 values");
    if (wants_key()) {
        if (shape != Node::Shape::scalar)
            stop(file_, mark.line + 1, "this line has no key",
                 "write NAME: VALUE; look for a missing bracket");
        return name(mark, std::move(text));
    }
    Node node;
    node.shape = shape;
    node.text = std::move(text);
    node.quoted = quoted;
    node.place = next_place(mark);
    if (shape == Node::Shape::list || shape == Node::Shape::map)
        open_.push_back({std::move(node), {}, false, 0});
    else
        attach(std::move(node));
}

void Builder::name(const YAML::Mark& mark, std::string key) {
    auto& level = open_.back();
    level.key = std::move(key);
    level.key_line = mark.line + 1;
    level.has_key = true;
}

void Builder::attach(Node node) {
    if (open_.empty()) {
        root_ = std::move(node);
        return;
    }
    auto& level = open_.back();
    const bool in_map = level.node.shape == Node::Shape::map;
    node.key = in_map ? level.key : "";
    level.has_key = false;
    if (in_map && level.node.children.size() >= most_keys)
        stop(file_, node.place.line, "one map of the plan has more than 1,000 keys");
    if (const Node* first = level.node.find(node.key); first != nullptr && !node.key.empty()) {
        mistakes_.add(
            node.place,
            "the key is written twice, first in line " + std::to_string(first->place.line),
            "keep one of the two");
        return;
    }
    level.node.children.push_back(std::move(node));
}

void Builder::open(const YAML::Mark& mark, const std::string& tag, YAML::anchor_t anchor,
                   Node::Shape shape) {
    if (open_.size() >= most_levels)
        stop(file_, mark.line + 1, "the plan is nested more than 32 levels deep");
    refuse_anchor(mark, anchor);
    if (!tag.empty() && tag != "?") refuse(mark, "a tag", "remove the word that starts with \"!\"");
    put(mark, shape);
}

void Builder::close() {
    Node node = std::move(open_.back().node);
    open_.pop_back();
    attach(std::move(node));
}

void Builder::OnScalar(const YAML::Mark& mark, const std::string& tag, YAML::anchor_t anchor,
                       const std::string& value) {
    refuse_anchor(mark, anchor);
    // "!" stands for quotes as well as for a tag without a name; the text itself tells them apart.
    const auto source = text_.substr(std::min(text_.size(), static_cast<std::size_t>(mark.pos)));
    const bool in_quotes = source.starts_with('"') || source.starts_with('\'');
    if ((tag != "?" && tag != "!") || source.starts_with('!'))
        refuse(mark, "a tag", "remove the word that starts with \"!\"");
    if (in_quotes && !is_closed(source))
        stop(file_, mark.line + 1, "a text starts with a quote that is never closed",
             "close it in the same line");
    put(mark, Node::Shape::scalar, value, tag == "!");
}

void Builder::refuse(const YAML::Mark& mark, const std::string& what, const std::string& todo) {
    const auto key = wants_key() ? open_.back().node.place.key : next_place(mark).key;
    mistakes_.add({file_, mark.line + 1, key}, "plans have no room for " + what, todo);
}

void Builder::refuse_anchor(const YAML::Mark& mark, YAML::anchor_t anchor) {
    if (anchor != 0) refuse(mark, "an anchor", "remove the word that starts with \"&\"");
}

}  // namespace

Node read_tree(const std::string& file, std::string text, Mistakes& mistakes) {
    if (text.size() > most_bytes) stop(file, 1, "the plan is larger than 1 MiB");
    if (text.starts_with("\xef\xbb\xbf")) text.erase(0, 3);
    check_bytes(file, text);
    Builder builder(file, text, mistakes);
    std::istringstream stream(text);
    try {
        YAML::Parser parser(stream);
        while (parser.HandleNextDocument(builder)) {
        }
    } catch (const YAML::Exception& error) {
        stop(file, error.mark.line + 1, "this is not YAML: " + error.msg,
             "look for a missing blank after a colon, a missing bracket or a wrong indent here");
    }
    if (builder.documents() == 0) stop(file, 1, "the plan is empty", "start with \"sunbudget: 1\"");
    return builder.take();
}

}  // namespace sunbudget
