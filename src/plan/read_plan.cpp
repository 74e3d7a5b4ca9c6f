#include <fstream>
#include <iterator>

#include "fill.hpp"
#include "sunbudget/base/error.hpp"
#include "validate.hpp"

namespace sunbudget {

Plan parse_plan(const PlanText& plan) {
    Mistakes mistakes;
    Node root = read_tree(plan.file, plan.text, mistakes);
    for (const auto& change : plan.overrides) apply_override(root, change, mistakes);
    validate(root, mistakes);
    Plan filled = fill_plan(plan.file, root);
    if (root.shape == Node::Shape::map) cross_check(filled, root, mistakes);
    mistakes.throw_if_any();
    return filled;
}

Plan read_plan(const std::filesystem::path& file, const std::vector<Override>& overrides) {
    std::ifstream stream(file, std::ios::binary);
    // One byte more than a plan may have is enough to refuse it.
    std::string text((std::size_t{1} << 20) + 1, '\0');
    stream.read(text.data(), static_cast<std::streamsize>(text.size()));
    if (stream.bad() || (stream.fail() && !stream.eof()))
        throw Error(Cause::input, "the plan cannot be read", file.string(),
                    "check the name and that you may read it");
    text.resize(static_cast<std::size_t>(stream.gcount()));
    return parse_plan({file.string(), std::move(text), overrides});
}

}  // namespace sunbudget
