#include <algorithm>

#include "rules_parts.hpp"

namespace sunbudget {

namespace {

/// One what-if after the other.
class ChangeRules : Rules {
  public:
    using Rules::Rules;
    void all() const {
        for (const auto& one : plan_.changes) change(one);
    }

  private:
    void change(const PlanChange& change) const;
    void check_name(const PlanChange& change) const;
    void check_albedo(const PlanChange& change) const;
    void check_height(const PlanChange& change) const;
};

void ChangeRules::change(const PlanChange& change) const {
    check_name(change);
    check_albedo(change);
    check_height(change);
    if (!change.albedo && !change.to_class && !change.emissivity && !change.height)
        mistakes_.add(change.place, "the change changes nothing",
                      "give albedo, class, emissivity or height");
    if (!change.where) return;
    if (!change.where->file && !change.where->classes)
        mistakes_.add(change.where->place, "nothing says where",
                      "give file, or classes of the land cover");
    if (change.where->classes && !written("surface.cover"))
        mistakes_.add(change.where->classes->place, "the plan has no land cover to find classes in",
                      "add surface.cover, or give file");
}

/// It becomes part of file names.
void ChangeRules::check_name(const PlanChange& change) const {
    const auto& name = *change.name;
    const auto is_plain = [](char c) {
        return (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z') || (c >= '0' && c <= '9') ||
               c == '-' || c == '_';
    };
    if (!std::ranges::all_of(name, is_plain) || name.find("__") != name.npos || name.size() > 40)
        mistakes_.add(change.name.place, "\"" + name + "\" cannot be part of a file's name here",
                      "use letters, digits, - and single _, at most 40");
    const auto first = std::ranges::find(plan_.changes, change.name, &PlanChange::name);
    if (&*first != &change)
        mistakes_.add(change.name.place, "two changes are named \"" + name + "\"",
                      "give each its own name");
}

void ChangeRules::check_albedo(const PlanChange& change) const {
    if (change.to_class && !written("surface.cover"))
        mistakes_.add(change.to_class->place,
                      "the plan has no land cover whose table has the class",
                      "add surface.cover, or give albedo");
    if (!change.albedo) return;
    const auto& [place, initial, aged, low, high] = *change.albedo;
    if (!has_albedo())
        mistakes_.add(place, "there is no albedo to change",
                      "add surface with cover, reflectance or albedo");
    if (!initial && !aged) mistakes_.add(place, "the albedo is not given", "give aged, or initial");
    if (low && high && **low > **high)
        mistakes_.add(low->place, "low lies above high", "exchange the two");
    if (low && aged && **low > **aged)
        mistakes_.add(low->place, "low lies above aged",
                      "low is the least to expect of an aged surface");
    if (high && aged && **high < **aged)
        mistakes_.add(high->place, "high lies below aged",
                      "high is the most to expect of an aged surface");
}

void ChangeRules::check_height(const PlanChange& change) const {
    if (!change.height) return;
    if (!has_elevation_raster())
        mistakes_.add(change.height->place, "there are no heights to change",
                      "add terrain.elevation with a raster");
    if (change.height->attribute && !(change.where && change.where->file))
        mistakes_.add(change.height->attribute->place, "an attribute belongs to polygons",
                      "add where with file");
    if (change.where && change.where->classes)
        mistakes_.add(change.where->classes->place,
                      "heights change inside polygons only, not by class", "give file alone");
    if (change.treatable && **change.treatable < 1)
        mistakes_.add(change.treatable->place, "ground cannot be raised in part",
                      "choose the polygons with query, and leave treatable out");
}

}  // namespace

void check_changes(const Plan& plan, const Node& root, Mistakes& mistakes) {
    ChangeRules(plan, root, mistakes).all();
}

}  // namespace sunbudget
