#include <fmt/format.h>

#include <cmath>
#include <memory>

#include <CLI/App.hpp>

#include "context.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/plan/resolve.hpp"
#include "sunbudget/raster/grid_build.hpp"
#include "sunbudget/report/explain.hpp"

namespace sunbudget {

namespace {

struct Flags {
    std::string plan;
    std::vector<std::string> set;
    std::string at;
    std::string crs;
    bool json = false;
    Common common;
};

struct PixelIndex {
    long column, row;
};

/// The pixel under the place that --at names.
PixelIndex pixel_at(const Flags& flags, const Grid& grid) {
    const auto parts = split(flags.at, ',');
    std::optional<double> x, y;
    if (parts.size() == 2) {
        x = parse_number(trimmed(parts[0]));
        y = parse_number(trimmed(parts[1]));
    }
    if (!x || !y)
        throw Error(Cause::usage, "\"" + flags.at + "\" is no place", "--at",
                    "write X,Y: easting or longitude first");
    std::string crs_wkt = grid.crs_wkt;
    if (!flags.crs.empty()) try {
            crs_wkt = crs_wkt_of(flags.crs);
        } catch (const Error& error) {
            throw error.at("--crs");
        }
    const auto place = place_in(grid, *x, *y, crs_wkt);
    const auto bounds = bounds_of(grid);
    const bool inside = place && place->column >= 0 && place->row >= 0 &&
                        place->column <= grid.width && place->row <= grid.height;
    if (!inside)
        throw Error(Cause::usage, "the place lies outside the run's grid", "--at",
                    fmt::format("the grid reaches from {:.10g}, {:.10g} to {:.10g}, {:.10g} in {}; "
                                "--crs says what X,Y are in",
                                bounds.west, bounds.south, bounds.east, bounds.north,
                                crs_name(grid.crs_wkt)));
    // The last pixel's far edge belongs to it.
    return {std::min(static_cast<long>(place->column), static_cast<long>(grid.width) - 1),
            std::min(static_cast<long>(place->row), static_cast<long>(grid.height) - 1)};
}

void explain(const Flags& flags) {
    Terminal terminal(flags.common.quiet);
    prepare(flags.common);
    // Classes are counted as a run does: a code without a row has to mean the same here.
    const Run run = resolve(read_plan(flags.plan, flags.set),
                            {flags.common.threads(), flags.common.memory_bytes(), true, {}});
    for (const auto& warning : run.warnings) terminal.warning(warning);
    const auto pixel = pixel_at(flags, run.grid);
    const auto account = account_of(run, pixel.column, pixel.row);
    print_result(flags.json ? explain_json(run, account) : explain_text(run, account));
}

}  // namespace

void add_explain(CLI::App& app) {
    auto flags = std::make_shared<Flags>();
    auto* command = app.add_subcommand(
        "explain",
        "The full account of one pixel of a plan: inputs, albedo, sun, horizon, light, layers");
    command->add_option("PLAN", flags->plan, "The plan file")->required();
    command
        ->add_option("--at", flags->at,
                     "The place: easting or longitude first, in the grid's CRS or that of --crs")
        ->type_name("X,Y")
        ->required();
    command
        ->add_option("--crs", flags->crs,
                     "What --at is in: EPSG:4326 for longitude,latitude [the grid's CRS]")
        ->type_name("EPSG:N");
    add_set_flag(*command, flags->set);
    command->add_flag("--json", flags->json,
                      "As JSON: every term of every period, units in the names");
    add_common_flags(*command, flags->common);
    command->footer(
        "The pixel's block is computed as a run would; the layers' figures are those of the run's "
        "files. Nothing is written.\n"
        "Example: sunbudget explain town.yaml --at 15.01,49.65 --crs EPSG:4326");
    command->callback([flags] { explain(*flags); });
}

}  // namespace sunbudget
