#pragma once

#include <functional>
#include <memory>
#include <optional>
#include <vector>

#include "beside.hpp"
#include "flags.hpp"
#include "flow_notes.hpp"
#include "ground.hpp"
#include "heat_flow.hpp"
#include "layer_rows.hpp"
#include "light_flow.hpp"
#include "needs.hpp"
#include "sunbudget/model/flow.hpp"

namespace sunbudget {

/// One thread's parts and the order of their work (flow.cpp), and what becomes layers (flow_layers.cpp).
struct Flow::State {
    State(const Run& run, const SharedLight& shared, int thread);

    const Run& run;
    const SharedLight& shared;
    Needs needs;
    FlowNotes notes;
    Beside beside;  ///< changes of albedo
    Ground ground;
    LightFlow light;
    std::optional<HeatFlow> heat;
    FlagCounts flag_counts;
    std::vector<std::unique_ptr<State>> raised;  ///< changes of height, as shared.raised()

    void begin(const Window& window);
    void some_bands(std::size_t first, std::size_t count, Sink& sink);
    void finish_flags(std::size_t sunlit);
    [[nodiscard]] DryScope scope() const { return {needs.level ? &ground.slope_deg : nullptr}; }

    void put_surface_layers(Sink& sink);
    void put_surface_layer(std::size_t n, Sink& sink);
    void put_light_layers(std::size_t band, std::size_t held, Sink& sink);
    void put_heat_layers(std::size_t band, std::size_t held, Sink& sink);

  private:
    using Row = std::function<void(int row, std::span<float> out)>;

    /// Rounds and hands on a layer of the run as it is, and with `after` those of the changes too.
    void put(std::size_t n, std::size_t band, const Row& row, Sink& sink);
    void put(std::size_t n, std::size_t band, const Row& row, const Beside::Row& after, Sink& sink);

    [[nodiscard]] bool is_thin(std::size_t band) const;
    [[nodiscard]] LitBand lit(std::size_t held) const;
    [[nodiscard]] LitBand lit(std::size_t held, const ChangedAlbedo& change) const;
    void sum_net_light(std::size_t band, const LitBand& lit, Plane<float>& kept) const;
    void balance_changes(std::size_t band, std::size_t held);

    Plane<float> stored_, net_light_;
};

}  // namespace sunbudget
