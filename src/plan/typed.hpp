#pragma once

#include <algorithm>
#include <cmath>
#include <filesystem>
#include <string>
#include <utility>

#include "names.hpp"
#include "scalars.hpp"
#include "tree.hpp"

namespace sunbudget {

/// The folder that relative paths of a plan start from.
[[nodiscard]] std::filesystem::path folder_of(const std::string& file);

/// Values from nodes, one overload a type. The nodes are valid: `validate` has seen to that.
class Typed {
  public:
    explicit Typed(std::filesystem::path folder) : folder_(std::move(folder)) {}

    template <class T>
    [[nodiscard]] Given<T> given(const Node& node) const {
        Given<T> value{{}, node.place};
        get(node, value.value);
        return value;
    }
    template <class T>
    void get(const Node& node, std::vector<Given<T>>& value) const {
        for (const auto& item : node.children) value.push_back(given<T>(item));
    }
    [[nodiscard]] static Given<int> duration_s(const Node& node) {
        const double seconds = *read_quantity(node, ValueKind::duration);
        return {static_cast<int>(std::lround(seconds)), node.place};
    }

  private:
    static void get(const Node& node, std::string& value);
    static void get(const Node& node, std::vector<std::string>& value);
    static void get(const Node& node, double& value);
    static void get(const Node& node, int& value);
    static void get(const Node& node, std::vector<int>& value);
    static void get(const Node& node, bool& value);
    static void get(const Node& node, WeatherColumn& value);
    static void get(const Node& node, std::vector<double>& value);
    static void get(const Node& node, CivilDate& value);
    static void get(const Node& node, HourWindow& value);
    static void get(const Node& node, OutputUnit& value);
    static void get(const Node& node, LayerId& value);
    static void get(const Node& node, PlanZone& value);
    static void get(const Node& node, PlanInstant& value);
    static void get(const Node& node, std::optional<int>& value);
    template <class Enum>
    requires requires(Enum e) { names_for(e); }
    static void get(const Node& node, Enum& value) {
        const auto& names = names_for(value);
        value = static_cast<Enum>(std::ranges::find(names, node.text) - names.begin());
    }
    template <std::size_t N>
    static void get(const Node& node, std::array<double, N>& value) {
        if (node.shape == Node::Shape::scalar) return value.fill(*read_number(node));
        std::ranges::transform(node.children, value.begin(),
                               [](const Node& item) { return *read_number(item); });
    }

    void get(const Node& node, PlanPath& value) const;
    void get(const Node& node, PlanRaster& value) const;
    void get(const Node& node, NamedPeriod& value) const;
    void get(const Node& node, std::variant<Totals, std::vector<NamedPeriod>>& value) const;
    void get(const Node& node, std::variant<LikeInput, PlanPath>& value) const;
    void get(const Node& node, TableChoice& value) const;
    static void get(const Node& node, PlanLength& value);
    void get(const Node& node, std::vector<PlanRaster>& value) const;
    void get(const Node& node, std::variant<Monthly, std::vector<PlanRaster>>& value) const;
    void get(const Node& node, std::variant<std::vector<PlanRaster>, PlanLength>& value) const;
    void get(const Node& node, PlanSkyNumbers& value) const;
    void get(const Node& node, std::variant<SlopeFrom, PlanPath>& value) const;

    static Monthly months(const Node& node, ValueKind kind);
    /// A number of the map's, or what stands for it.
    static double number_or(const Node& map, const char* name, double otherwise);
    static std::string text_or_none(const Node& map, const char* name);

    void get(const Node& node, PlanFieldRaster& value) const;
    void field(const Node& node, ValueKind kind,
               std::variant<Monthly, PlanFieldRaster>& value) const;
    void get(const Node& node, PlanTemperatures& value) const;
    void get(const Node& node, PlanPressures& value) const;
    void get(const Node& node, PlanShares& value) const;
    static void get(const Node& node, PlanWind& value);
    static void get(const Node& node, PlanLapse& value);
    void get(const Node& node, PlanEmissivity& value) const;
    void get(const Node& node, PlanSurfaceRaster& value) const;
    void get(const Node& node, PlanSurfaceTemperature& value) const;

    static bool is_choice(const Node& node, const std::string& key);
    [[nodiscard]] PlanPath path_of(const std::string& given) const;

    std::filesystem::path folder_;
};

}  // namespace sunbudget
