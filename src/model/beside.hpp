#pragma once

#include <filesystem>
#include <functional>
#include <optional>
#include <string>
#include <vector>

#include "heat_flow.hpp"
#include "sunbudget/model/change.hpp"
#include "sunbudget/model/flow.hpp"

namespace sunbudget {

/// Light of one band on the surface.
struct BandPlanes {
    Plane<float> direct, diffuse, reflected, hours;
};

/// A change of the ground itself, in albedo or emissivity, in one window: what of light and balance differs
/// from the base.
struct ChangedAlbedo {
    std::size_t change = 0;  ///< counts the run's changes
    bool touched =
        false;  ///< false: nothing in sight of the window changes, and the base's planes serve
    bool heats = false;  ///< one of its layers is about heat
    Plane<float> albedo, albedo_seen;
    Plane<float> emissivity, dry;  ///< where it heats; empty where the run has none
    Plane<float> net_light;        ///< of the band at work, likewise
    HeatPlanes heat;
    Plane<float> open_diffuse;  ///< of the band at work, where the ground lights the sky
    /// By band held; `diffuse` where the ground lights the sky, `reflected` past terrain.
    std::vector<Plane<float>> diffuse, reflected;
};

/// The layers of one change that belong to a layer of the base.
struct ChangeOutputs {
    std::optional<std::size_t> after, saved;  ///< count the run's layers
};

/// One thread's changes beside the base: those of albedo are balanced here with the base's beam and sky
/// light; for those of height it keeps what they are compared with.
class Beside {
  public:
    explicit Beside(const Run& run);

    /// `heat` is nothing where the run has none.
    void begin(const Window& window, const Plane<float>& albedo, const HeatFlow* heat);
    /// Before some bands, of which none or all are lit.
    void some_bands(std::size_t first, std::size_t count, std::size_t lit, bool ground_lights_sky);
    /// After the mean albedo of a block was taken from the albedo around it.
    void see(const Window& block, const Window& window, const Plane<float>& around,
             const Plane<float>& mean);
    /// The same where nobody knows the albedo.
    void see(float albedo);

    /// A row of a layer after a change, before rounding.
    using Row = std::function<void(const ChangedAlbedo&, int row, std::span<float> out)>;
    /// The changes' layers that belong to layer `n` of the base, whose plane as stored is `before`.
    void put(std::size_t n, std::size_t band, const Plane<float>& before, const Row& row,
             Sink& sink);
    void put_treated(Sink& sink);

    /// Takes note of a plane of the base, as stored.
    void keep(std::size_t n, std::size_t band, const Plane<float>& stored);
    [[nodiscard]] const Plane<float>& kept(std::size_t n, std::size_t band) const {
        return kept_[n][band - first_band_];
    }

    std::vector<ChangedAlbedo> albedos;

  private:
    const Run& run_;
    std::vector<ChangeReader> readers_;  ///< by change
    Window window_;
    std::size_t first_band_ = 0;
    std::vector<std::vector<ChangeOutputs>> outputs_;  ///< by layer of the base and changed albedo
    std::vector<bool> keeps_;  ///< by layer: a change of height is compared with it
    std::vector<std::vector<Plane<float>>> kept_;  ///< by layer and band held
    Plane<float> scratch_, difference_;
};

/// Before less after, as both are stored.
void subtract(const Plane<float>& before, const Plane<float>& after, Plane<float>& out);

/// The run after a change of height, with a terrain pass of its own.
struct RaisedRun {
    Run run;
    std::vector<ChangeOutputs>
        outputs;  ///< by layer of `run`: where they go among the layers of the base
    std::vector<std::size_t> bases;  ///< by layer of `run`
    std::filesystem::path scratch_folder;

    RaisedRun(const Run& base, std::size_t change, int threads,
              const std::filesystem::path& scratch);
    ~RaisedRun();
    [[nodiscard]] const SharedLight& light() const { return *light_; }

  private:
    std::unique_ptr<SharedLight> light_;
};

/// Takes the planes of a raised run and gives them, and what is saved, to the base's sink.
class SavedSink : public Sink {
  public:
    SavedSink(const Beside& base, const RaisedRun& raised, Sink& sink)
        : base_(base), raised_(raised), sink_(sink) {}
    void put(std::size_t layer, std::size_t band, const Window& window,
             const Plane<float>& plane) override;
    void put(std::size_t layer, std::size_t band, const Window& window,
             const Plane<std::uint16_t>& plane) override;

  private:
    const Beside& base_;
    const RaisedRun& raised_;
    Sink& sink_;
};

}  // namespace sunbudget
