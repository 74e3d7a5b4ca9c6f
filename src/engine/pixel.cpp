#include "sunbudget/engine/pixel.hpp"

#include <algorithm>
#include <array>
#include <cassert>
#include <cmath>
#include <limits>

#include "scratch_folder.hpp"
#include "sunbudget/model/flow.hpp"

namespace sunbudget {

namespace {

/// Keeps one pixel of what it is given.
class PixelSink : public Sink {
  public:
    explicit PixelSink(const Probe& probe, std::vector<std::vector<double>>& layers)
        : probe_(probe), layers_(layers) {}
    void put(std::size_t layer, std::size_t band, const Window& window,
             const Plane<float>& plane) override {
        layers_[layer][band] = static_cast<double>(probe_.of(plane, window));
    }
    void put(std::size_t layer, std::size_t band, const Window& window,
             const Plane<std::uint16_t>& plane) override {
        layers_[layer][band] = probe_.of(plane, window);
    }

  private:
    const Probe& probe_;
    std::vector<std::vector<double>>& layers_;
};

Window block_around(const Grid& grid, long column, long row) {
    const long left = column / block_px * block_px, top = row / block_px * block_px;
    return {left, top, static_cast<int>(std::min<long>(block_px, grid.width - left)),
            static_cast<int>(std::min<long>(block_px, grid.height - top))};
}

std::optional<double> known(double value) {
    return std::isnan(value) ? std::nullopt : std::optional(value);
}

/// A pixel of a source as the run reads it: the bits do not depend on the window.
std::optional<double> value_at(const Source& source, long column, long row) {
    Reader reader(source);
    const Window pixel{column, row, 1, 1};
    if (source.spec().kind == DataKind::code) {
        Plane<std::int32_t> code;
        reader.read_codes(pixel, code);
        return code.at(0, 0) == no_code ? std::nullopt : std::optional<double>(code.at(0, 0));
    }
    Plane<float> value;
    reader.read(pixel, value);
    return known(static_cast<double>(value.at(0, 0)));
}

/// The file's own number, without scale and offset, on the file's own grid.
std::optional<double> raw_at(const Source& source, const PixelPlace& place) {
    auto spec = source.spec();
    spec.scaling = Scaling{};
    const auto own = Source::open(spec, source.info().grid);
    return value_at(own, static_cast<long>(std::floor(place.column)),
                    static_cast<long>(std::floor(place.row)));
}

/// Where the pixel's middle falls in the file.
std::optional<PixelPlace> place_in_file(const Source& source, long column, long row) {
    std::array columns{static_cast<double>(column) + 0.5}, rows{static_cast<double>(row) + 0.5};
    const auto& grid = source.info().grid;
    places_in(grid, source.target(), columns, rows);
    const bool on_it =
        columns[0] >= 0 && rows[0] >= 0 && columns[0] < grid.width && rows[0] < grid.height;
    return on_it ? std::optional(PixelPlace{columns[0], rows[0]}) : std::nullopt;
}

std::vector<InputPixel> inputs_at(const Run& run, long column, long row) {
    std::vector<InputPixel> inputs;
    for (const auto& file : run.inputs) {
        if (!file.source) continue;
        InputPixel input{&file,
                         place_in_file(*file.source, column, row),
                         {},
                         value_at(*file.source, column, row)};
        if (input.place) input.raw = raw_at(*file.source, *input.place);
        inputs.push_back(std::move(input));
    }
    return inputs;
}

}  // namespace

PixelAccount account_of(const Run& run, long column, long row) {
    assert(column >= 0 && column < run.grid.width && row >= 0 && row < run.grid.height);
    PixelAccount account{Probe(column, row), {}, inputs_at(run, column, row), {}, 0};
    for (const auto& layer : run.layers)
        account.layers.emplace_back(layer.file.bands.size(),
                                    std::numeric_limits<double>::quiet_NaN());
    account.place =
        Locator(run.grid).at(static_cast<double>(column) + 0.5, static_cast<double>(row) + 0.5);
    const ScratchFolder scratch;
    const SharedLight light(run, 1, scratch.path);
    Flow flow(run, light, 0);
    flow.watch(account.probe);
    PixelSink sink(account.probe, account.layers);
    flow.compute(block_around(run.grid, column, row), sink);
    for (const auto& term : account.probe.terms())
        if (term.name == "quality") account.quality = static_cast<std::uint16_t>(term.value);
    return account;
}

}  // namespace sunbudget
