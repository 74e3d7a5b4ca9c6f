// Cost of the terrain kernels on a made surface, in nanoseconds for each pixel, direction and core:
//     terrain_bench [pixels a side, default 8192]
#include <cmath>
#include <cstdio>
#include <cstdlib>
#include <ctime>
#include <numbers>
#include <vector>

#include "sunbudget/base/units.hpp"
#include "sunbudget/physics/beam_table.hpp"
#include "sunbudget/physics/gradient.hpp"
#include "sunbudget/physics/horizon.hpp"
#include "sunbudget/physics/levels.hpp"

namespace {

using namespace sunbudget;
constexpr int block_size = 256;
constexpr int directions = 64;

/// Of this thread on its core: what others run beside it hardly counts.
double core_seconds() {
    timespec now{};
    clock_gettime(CLOCK_THREAD_CPUTIME_ID, &now);
    return static_cast<double>(now.tv_sec) + 1e-9 * static_cast<double>(now.tv_nsec);
}

/// Hills of 16 lengths from 8 to 1,500 pixels, at 10 m: slopes as in mountains.
Plane<float> hills(int side) {
    Plane<float> height_m(side, side, 1500.0F);
    std::vector<float> along(static_cast<std::size_t>(side)), across(along.size());
    for (int wave = 0; wave < 16; ++wave) {
        const double length_px = 8 * std::pow(1.42, wave);
        const double turn = 2.4 * wave;
        const double size_m = 0.5 * length_px;
        for (int r = 0; r < side; ++r) {
            const auto row = height_m.row(r);
            const double start = r * std::sin(turn) / length_px * 2 * std::numbers::pi;
            const double step = std::cos(turn) / length_px * 2 * std::numbers::pi;
            // sin and cos of an even progression, by turning on.
            double s = std::sin(start), c = std::cos(start);
            const double ds = std::sin(step), dc = std::cos(step);
            for (float& height : row) {
                height += static_cast<float>(size_m * s);
                const double next = s * dc + c * ds;
                c = c * dc - s * ds;
                s = next;
            }
        }
    }
    return height_m;
}

Plane<float> cut(const Plane<float>& raster, Window window) {
    Plane<float> piece(window.width, window.height, std::nanf(""));
    for (int r = 0; r < window.height; ++r)
        for (int c = 0; c < window.width; ++c) {
            const auto column = static_cast<int>(window.column) + c;
            const auto row = static_cast<int>(window.row) + r;
            if (column >= 0 && row >= 0 && column < raster.width() && row < raster.height())
                piece.at(c, r) = raster.at(column, row);
        }
    return piece;
}

struct Costs {
    double patches = 0, slopes = 0, start = 0, far = 0, near = 0, tangents = 0, sky_view = 0,
           sines = 0, table_one = 0, table_twelve = 0, step = 0;
};

/// A year's suns between two directions in each of twelve periods.
std::vector<BeamTable> year_tables() {
    std::vector<BeamTable> tables(12);
    for (int period = 0; period < 12; ++period) {
        for (int sun = 0; sun < 60; ++sun) {
            const double sine = 0.05 + 0.013 * sun + 0.005 * period;
            tables[static_cast<std::size_t>(period)].add(
                {0, sine, sine + 0.01, {300, 200, 900 * sine}, 0.2}, std::fmod(0.37 * sun, 1.0));
        }
        tables[static_cast<std::size_t>(period)].finish();
    }
    return tables;
}

template <typename Work>
void timed(double& sum, Work work) {
    const double start = core_seconds();
    work();
    sum += (core_seconds() - start);
}

void work_block(const Plane<float>& height_m, const std::vector<Level>& levels, Window block,
                const std::vector<BeamTable>& tables, Costs& costs, double& check) {
    const PixelMatrix matrix{10, 0, 0, -10};
    const Sight sight;
    HeightPatch patch;
    std::vector<LevelPatch> level_patches;
    timed(costs.patches, [&] {
        patch = make_height_patch(patch_window(block), cut(height_m, patch_window(block)));
        for (int level = 1; level <= levels_for(10, sight); ++level) {
            const auto window = level_window(block, level);
            const auto& from = levels[static_cast<std::size_t>(level - 1)];
            level_patches.push_back(make_level_patch(level, window, cut(from.maximum_m, window),
                                                     cut(from.mean_m, window)));
        }
    });
    const auto plane = [&] { return Plane<float>(block.width, block.height); };
    auto per_column = plane(), per_row = plane(), east = plane(), north = plane(), up = plane();
    timed(costs.slopes, [&] {
        const auto back = inverse(matrix);
        const auto width = static_cast<std::size_t>(block.width);
        for (int r = 0; r < block.height; ++r) {
            const auto padded = [&](int row) {
                return std::span<const float>(patch.height_m.row(near_steps + row))
                    .subspan(near_steps - 1, width + 2);
            };
            horn_gradient(padded(r - 1), padded(r), padded(r + 1), per_column.row(r),
                          per_row.row(r));
            surface_normals(per_column.row(r), per_row.row(r), back, back, east.row(r),
                            north.row(r), up.row(r));
        }
    });
    auto rise = plane(), before = plane(), after = plane(), sky = plane();
    std::vector<Plane<float>> sums;
    for (int i = 0; i < 24; ++i) sums.push_back(plane());
    const auto normal = [&](int r) { return NormalRow{east.row(r), north.row(r), up.row(r)}; };
    const auto each_row = [&](auto work) {
        for (int r = 0; r < block.height; ++r) work(r);
    };
    const std::vector<PlacedSun> suns(8, {{0, 0.3, 0.32, {300, 200, 400}, 0.2}, 0.4});
    for (int d = 0; d < directions; ++d) {
        const double azimuth_rad = 2 * std::numbers::pi * d / directions;
        const auto direction = direction_towards(matrix, azimuth_rad);
        const StepScale scale{static_cast<float>(1 / direction.step_m), 0};
        timed(costs.start, [&] {
            each_row([&](int r) {
                start_rise(per_column.row(r), per_row.row(r), direction, rise.row(r));
            });
        });
        timed(costs.far, [&] {
            raise_by_far(far_rise(level_patches, direction, sight, block), patch, block, rise);
        });
        timed(costs.near, [&] { raise_by_near(patch, direction, sight, block, rise); });
        timed(costs.tangents, [&] {
            each_row([&](int r) {
                tangents(std::span<const float>(patch.height_m.row(near_steps + r))
                             .subspan(near_steps, rise.row(r).size()),
                         rise.row(r), scale, rise.row(r));
            });
        });
        timed(costs.sky_view, [&] {
            each_row([&](int r) { add_sky_view(rise.row(r), normal(r), azimuth_rad, sky.row(r)); });
        });
        std::swap(before, after);
        timed(costs.sines,
              [&] { each_row([&](int r) { horizon_sines(rise.row(r), after.row(r)); }); });
        const auto looked = [&](std::size_t periods) {
            each_row([&](int r) {
                std::array<BeamSums, 12> rows;
                for (std::size_t p = 0; p < periods; ++p)
                    rows[p] = {sums[2 * p].row(r), sums[2 * p + 1].row(r)};
                add_beams({tables.data(), periods}, {before.row(r), after.row(r)}, normal(r),
                          {rows.data(), periods});
            });
        };
        timed(costs.table_one, [&] { looked(1); });
        timed(costs.table_twelve, [&] { looked(12); });
        timed(costs.step, [&] {
            each_row([&](int r) {
                add_suns(suns, {before.row(r), after.row(r)}, normal(r),
                         {sums[0].row(r), sums[1].row(r)});
            });
        });
    }
    each_row([&](int r) { finish_sky_view(sky.row(r), directions); });
    check += static_cast<double>(sky.at(7, 7) + sums[0].at(9, 9));
}

}  // namespace

int main(int count, char** words) {
    const int side = count > 1 ? std::atoi(words[1]) : 8192;
    const auto height_m = hills(side);
    const Sight sight;
    const double start = core_seconds();
    const auto levels = build_levels(height_m, levels_for(10, sight));
    std::printf("levels of %d x %d pixels: %.2f ns a pixel\n", side, side,
                (core_seconds() - start) * 1e9 / side / side);
    const auto tables = year_tables();
    Costs costs;
    double check = 0;
    int blocks = 0;
    // Nine blocks spread over the raster are enough.
    for (int i = 1; i <= 3; ++i)
        for (int j = 1; j <= 3; ++j, ++blocks)
            work_block(height_m, levels,
                       {(side / 4 * i) / block_size * block_size,
                        (side / 4 * j) / block_size * block_size, block_size, block_size},
                       tables, costs, check);
    const double pixels = 1.0 * blocks * block_size * block_size;
    const auto line = [&](const char* name, double seconds, double times) {
        std::printf("%-46s %7.2f\n", name, seconds * 1e9 / pixels / times);
    };
    std::printf("ns a pixel and core\n");
    line("patches, once", costs.patches, 1);
    line("slopes and normals, once", costs.slopes, 1);
    std::printf("ns a pixel, direction and core\n");
    line("own plane", costs.start, directions);
    line("far, 640 m to 20 km", costs.far, directions);
    line("near, 64 pixels", costs.near, directions);
    line("tangents", costs.tangents, directions);
    line("sky view", costs.sky_view, directions);
    line("sines", costs.sines, directions);
    line("table, one period", costs.table_one, directions);
    line("table, twelve periods", costs.table_twelve, directions);
    line("suns one by one (a sun)", costs.step, 8 * directions);
    std::printf("(check %.6f)\n", check);
    return 0;
}
