#include <algorithm>

#include "band_reader.hpp"
#include "pixel_map.hpp"
#include "resample.hpp"
#include "sunbudget/raster/source.hpp"

namespace sunbudget {

struct Reader::State {
    const Source& source;
    PixelMap map;
    BandReader band;
    Plane<std::int32_t> codes;  // scratch of read_values

    explicit State(const Source& s)
        : source(s),
          map(s.target(), s.info().grid),
          band(s.info(), s.nodata(), s.scaling(), map.period()) {}

    [[nodiscard]] bool copied() const {
        return source.alignment() == Alignment::same || source.alignment() == Alignment::shifted;
    }
};

namespace {

void values_of(const Plane<std::int32_t>& codes, const CodeValues& values, Plane<float>& out) {
    if (out.width() != codes.width() || out.height() != codes.height())
        out = Plane<float>(codes.width(), codes.height());
    for (int r = 0; r < codes.height(); ++r) values.of_row(codes.row(r), out.row(r));
}

}  // namespace

Reader::Reader(const Source& source) : state_(std::make_unique<State>(source)) {}
Reader::~Reader() = default;
Reader::Reader(Reader&&) noexcept = default;
Reader& Reader::operator=(Reader&&) noexcept = default;

void Reader::read(const Window& window, Plane<float>& out) {
    auto& s = *state_;
    if (s.copied())
        return s.band.read({window.column + s.source.column_shift_,
                            window.row + s.source.row_shift_, window.width, window.height},
                           out);
    take_mean(
        s.map, window, [&s](const Window& from, Plane<float>& to) { s.band.read(from, to); }, out);
}

void Reader::read_codes(const Window& window, Plane<std::int32_t>& out) {
    auto& s = *state_;
    if (s.copied())
        return s.band.read_codes({window.column + s.source.column_shift_,
                                  window.row + s.source.row_shift_, window.width, window.height},
                                 out);
    take_nearest(
        s.map, window,
        [&s](const Window& from, Plane<std::int32_t>& to) { s.band.read_codes(from, to); }, out);
}

void Reader::read_values(const Window& window, const CodeValues& values, Plane<float>& out) {
    auto& s = *state_;
    if (s.source.values_alignment() != Alignment::averaged) {
        read_codes(window, s.codes);
        return values_of(s.codes, values, out);
    }
    take_mean(
        s.map, window,
        [&](const Window& from, Plane<float>& to) {
            s.band.read_codes(from, s.codes);
            values_of(s.codes, values, to);
        },
        out);
}

std::uint64_t Reader::infinities() const noexcept {
    return state_->band.infinities();
}

}  // namespace sunbudget
