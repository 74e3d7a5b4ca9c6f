#pragma once

#include <cstdint>
#include <memory>
#include <optional>
#include <string>
#include <vector>

#include "sunbudget/base/plane.hpp"
#include "sunbudget/model/treated_area.hpp"
#include "sunbudget/raster/source.hpp"

namespace sunbudget {

/// What becomes of the heights: exactly one of these.
struct HeightChange {
    std::optional<double> add_m;  ///< the same everywhere
    bool add_numbers = false;     ///< the polygons' numbers, in metres
    std::vector<Source> instead;  ///< a raster of the heights after; none where it has no value
};

/// Classes of a land cover that a change is limited to.
struct ChangedClasses {
    Source codes;
    CodeValues listed;  ///< 1 for the classes, 0 for all others
    /// What every class has after the change, where the run's own comes from this cover.
    std::optional<CodeValues> albedo_after{}, emissivity_after{}, dry_after{};
};

/// A named what-if beside the run as it is. Never changes, and may be shared between threads.
struct Change {
    std::string name;
    /// Empty, or which of the albedos given for it this is: initial, low, high.
    std::string case_name{};
    std::shared_ptr<const TreatedArea> where{};  ///< nothing: everywhere
    std::optional<ChangedClasses> classes{};     ///< nothing: every class
    double treatable = 1;                        ///< share of the place that is treated
    std::optional<double> albedo{};              ///< of what is treated
    std::optional<double> emissivity{};          ///< likewise; nothing where the run needs none
    std::optional<double> dry{};  ///< 1 where it becomes a dry built or bare kind, 0 where another
    std::optional<HeightChange> height{};
    std::optional<double> lifetime_years{};
    std::optional<double> cost_per_m2{};  ///< of treated map area, in a currency of the user's
};

/// Puts a change into effect, window by window. One object a thread; it refers to its change.
///
/// Windows may reach beyond the grid. The bits of a pixel do not depend on the window.
class ChangeReader {
  public:
    explicit ChangeReader(const Change& change);
    ~ChangeReader();
    ChangeReader(ChangeReader&&) noexcept;

    /// False where nothing in the window can change.
    [[nodiscard]] bool touches(const Window& window) const;
    /// The share of each pixel that is treated, [0, 1].
    void treated(const Window& window, Plane<float>& share);
    /// Turns albedo before into albedo after. It mixes linearly; NaN stays.
    void albedo(const Window& window, Plane<float>& albedo);
    /// The same for emissivity, and for dryness: 1 where a surface is dry and built or bare.
    void emissivity(const Window& window, Plane<float>& emissivity);
    void dry(const Window& window, Plane<float>& dry);
    /// The same for heights. A pixel that lies partly inside is raised by that part.
    void heights(const Window& window, Plane<float>& heights_m);

  private:
    struct State;
    std::unique_ptr<State> state_;
};

}  // namespace sunbudget
