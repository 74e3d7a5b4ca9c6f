#include "fill.hpp"

#include <utility>

#include "fields.hpp"
#include "typed.hpp"

namespace sunbudget {

namespace {

/// Puts what stands in the tree into the plan's members.
class Filler {
  public:
    Filler(const Node& root, std::filesystem::path folder)
        : node_(&root), typed_(std::move(folder)) {}

    template <class T>
    void value(const char* name, Given<T>& member) {
        if (node_->has(name)) member = typed_.given<T>(*node_->find(name));
    }
    template <class T>
    void value(const char* name, Maybe<T>& member) {
        if (node_->has(name)) member = typed_.given<T>(*node_->find(name));
    }
    template <class T>
    void value(const char* name, std::vector<Given<T>>& member) {
        if (node_->has(name)) typed_.get(*node_->find(name), member);
    }
    void duration(const char* name, Maybe<int>& member) {
        if (node_->has(name)) member = Typed::duration_s(*node_->find(name));
    }
    template <class Inside>
    void map(const char* name, const Inside& visit_inside) {
        if (!node_->has(name)) return;
        const Node* outside = std::exchange(node_, node_->find(name));
        visit_inside();
        node_ = outside;
    }
    template <class Section, class Inside>
    void map(const char* name, std::optional<Section>& section, const Inside& visit_inside) {
        map(name, [&] {
            place_of(section.emplace()) = node_->place;
            visit_inside(*section);
        });
    }

    template <class Item, class Inside>
    void list(const char* name, std::vector<Item>& items, const Inside& visit_inside) {
        if (!node_->has(name)) return;
        const Node* outside = node_;
        for (const auto& child : outside->find(name)->children) {
            node_ = &child;
            items.emplace_back().place = child.place;
            visit_inside(items.back());
        }
        node_ = outside;
    }

  private:
    template <class Section>
    static Place& place_of(Section& section) {
        return section.place;
    }
    static Place& place_of(PlanWeights& weights) { return weights.bands.place; }

    const Node* node_;
    Typed typed_;
};

}  // namespace

Plan fill_plan(const std::string& file, const Node& root) {
    Plan plan;
    plan.file = file;
    Filler filler(root, folder_of(file));
    visit_plan(plan, filler);
    return plan;
}

}  // namespace sunbudget
