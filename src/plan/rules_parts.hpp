#pragma once

#include <string>
#include <string_view>

#include "fill.hpp"

namespace sunbudget {

/// What the rules of every section look at: the plan, and the tree it was read from.
class Rules {
  public:
    Rules(const Plan& plan, const Node& root, Mistakes& mistakes)
        : plan_(plan), root_(root), mistakes_(mistakes) {}

  protected:
    /// Whether the key is written at all, right or wrong: a wrong one has its own problem already.
    [[nodiscard]] bool written(std::string_view path) const;
    [[nodiscard]] Place place_of(const char* section, const char* key) const {
        return root_.find(section)->find(key)->place;
    }
    [[nodiscard]] bool has_elevation_raster() const;
    /// Of cover, image or given albedo.
    [[nodiscard]] bool has_albedo() const;
    /// In numbers or rasters of the weather's, beside no table.
    [[nodiscard]] bool has_humidity() const;
    [[nodiscard]] bool is_output(LayerId id) const;
    /// A problem where the plan wants layers that need what it does not have.
    void layers_without(bool Layer::*need, const std::string& what, const std::string& todo) const;

    const Plan& plan_;
    const Node& root_;
    Mistakes& mistakes_;
};

// The sections, each in a file of its own.
void check_time(const Plan& plan, const Node& root, Mistakes& mistakes);
void check_weather(const Plan& plan, const Node& root, Mistakes& mistakes);
/// The layers of heat, and what they are made from.
void check_heat(const Plan& plan, const Node& root, Mistakes& mistakes);
void check_changes(const Plan& plan, const Node& root, Mistakes& mistakes);
void check_reflectance(const Plan& plan, const Node& root, Mistakes& mistakes);

}  // namespace sunbudget
