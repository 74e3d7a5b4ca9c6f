#pragma once

namespace sunbudget {

/// From a step in (column, row) to a step on the ground in metres (east, north), true north up, at
/// one place of a grid. It holds spacing, scale factor, convergence and rotation: who has it needs
/// no CRS.
struct PixelMatrix {
    double east_per_column = 1;
    double east_per_row = 0;
    double north_per_column = 0;
    double north_per_row = -1;

    friend bool operator==(const PixelMatrix&, const PixelMatrix&) = default;

    /// Negative for a grid whose rows run south, as most do; its size is the pixel's map area [m2].
    [[nodiscard]] constexpr double determinant() const noexcept {
        return east_per_column * north_per_row - east_per_row * north_per_column;
    }
};

/// From metres (east, north) to a step in (column, row).
struct InversePixelMatrix {
    double column_per_east = 1;
    double column_per_north = 0;
    double row_per_east = 0;
    double row_per_north = -1;
};

/// The determinant may not be 0.
[[nodiscard]] constexpr InversePixelMatrix inverse(const PixelMatrix& m) noexcept {
    const double d = m.determinant();
    return {m.north_per_row / d, -m.east_per_row / d, -m.north_per_column / d,
            m.east_per_column / d};
}

}  // namespace sunbudget
