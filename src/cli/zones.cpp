#include <fmt/format.h>

#include <algorithm>
#include <filesystem>
#include <memory>

#include <CLI/App.hpp>

#include "context.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/decide/zone_table.hpp"
#include "sunbudget/engine/output_set.hpp"
#include "sunbudget/tables/class_table.hpp"
#include "sunbudget/tables/layers.hpp"

namespace sunbudget {

namespace {

namespace fs = std::filesystem;

struct ZoneFlags {
    std::vector<std::string> rasters;
    std::vector<std::string> layers;
    std::string polygons, layer, where, id = "fid", above, slope, cover, classes, out, geopackage;
    Common common;
};

/// Layers that a mean has no meaning of, and the one that the areas are worked out with.
bool left_out(const std::string& name) {
    return name == "aspect" || name == "quality" || name == "slope" ||
           name.ends_with("_uncertainty");
}

/// The layers of a finished run, in the order they were written.
std::vector<fs::path> layers_in(const fs::path& folder, const std::vector<std::string>& wanted) {
    const auto names = complete_set(folder);
    if (names.empty())
        throw Error(Cause::input,
                    "the folder holds no complete run (no SHA256SUMS, or files are missing)",
                    folder.string(), "name the rasters themselves, or run the plan again");
    std::vector<std::string> there;
    for (const auto& name : names)
        if (name.ends_with(".tif")) there.push_back(fs::path(name).stem().string());
    std::vector<fs::path> files;
    for (const auto& name : wanted)
        if (std::ranges::find(there, name) == there.end())
            throw Error(Cause::usage, "the run has no layer \"" + name + "\"", folder.string(),
                        suggestion(name, there));
    for (const auto& name : wanted.empty() ? there : wanted)
        if (!wanted.empty() || !left_out(name)) files.push_back(folder / (name + ".tif"));
    // Uncertainties are found beside their layers.
    for (const auto& name : there)
        if (name.ends_with("_uncertainty")) files.push_back(folder / (name + ".tif"));
    return files;
}

ZoneRasters rasters_of(const ZoneFlags& flags) {
    ZoneRasters rasters;
    for (const auto& text : flags.rasters) {
        if (!fs::is_directory(text)) {
            if (!flags.layers.empty())
                throw Error(Cause::usage,
                            "--layers chooses from a run's folder, and this is a file", text,
                            "leave --layers out");
            rasters.files.emplace_back(text);
            continue;
        }
        for (auto& file : layers_in(text, flags.layers)) rasters.files.push_back(std::move(file));
        if (const auto slope = fs::path(text) / "slope.tif";
            flags.slope.empty() && fs::exists(slope))
            rasters.slope = slope;
    }
    if (!flags.slope.empty()) rasters.slope = flags.slope;
    if (!flags.cover.empty()) rasters.cover = raster_name(flags.cover);
    if (!flags.classes.empty()) {
        const auto shipped = shipped_class_table_names();
        const bool ours = std::ranges::find(shipped, flags.classes) != shipped.end();
        const auto table =
            ours ? shipped_class_table(flags.classes) : read_class_table(flags.classes);
        for (const auto& row : table.rows()) rasters.class_names[row.code] = row.name;
    }
    if (!flags.above.empty()) {
        rasters.above = parse_number(flags.above);
        if (!rasters.above)
            throw Error(Cause::usage, "\"" + flags.above + "\" is no number", "--above",
                        "give one in the layers' unit");
    }
    return rasters;
}

/// One file of its own, under its name only when it is whole.
template <typename Write>
void publish(const fs::path& file, const Write& write) {
    OutputSet outputs(absolute_parent(file), OutputSet::Mark::none);
    const auto name = file.filename().string();
    write(outputs.staged(name));
    outputs.publish({name});
}

void run_zones(const ZoneFlags& flags, Terminal& terminal) {
    prepare(flags.common);
    const auto rasters = rasters_of(flags);
    const auto question = question_about(rasters);
    const PolygonName shapes{flags.polygons, flags.layer, flags.where};
    const auto polygons = read_polygons(shapes, question.grid, {flags.id, {}});
    const auto answers = zone_answers(question, polygons.all,
                                      {flags.common.threads(), [&](double done, double total) {
                                           terminal.progress("zones", done, total, "Mpixel");
                                       }});
    terminal.end_progress();
    const ZoneTable table(question, polygons.all, answers, flags.id);
    publish(flags.out, [&](const fs::path& file) { table.write_csv(file); });
    if (!flags.geopackage.empty())
        publish(flags.geopackage, [&](const fs::path& file) {
            write_features(file, shapes, "zones", table.columns(), table.rows(),
                           [&](std::size_t row) { return table.row(row); });
        });
    for (const auto& note : polygons.notes) terminal.warning(note);
    for (const auto& note : zone_notes(question, answers)) terminal.note(note);
    terminal.note(fmt::format("{}: figures of {} zones", flags.out, polygons.all.size()));
}

}  // namespace

void add_zones(CLI::App& app) {
    auto flags = std::make_shared<ZoneFlags>();
    auto* command = app.add_subcommand(
        "zones", "Figures of parcels, blocks or wards from rasters already made");
    command
        ->add_option("RASTER", flags->rasters,
                     "Rasters of one grid, or the folder of a finished run")
        ->required();
    command
        ->add_option("--polygons", flags->polygons,
                     "The zones: GeoPackage, GeoJSON, shapefile or FlatGeobuf, in any CRS")
        ->required()
        ->type_name("FILE");
    command->add_option("--layer", flags->layer, "Layer of that file [its only one]")
        ->type_name("NAME");
    command
        ->add_option("--where", flags->where,
                     "Only zones this SQL condition holds for: \"kind = 'school'\"")
        ->type_name("SQL");
    command->add_option("--id", flags->id, "The field that names a zone, or fid [fid]")
        ->type_name("FIELD");
    command
        ->add_option("--layers", flags->layers,
                     "From a run's folder only these layers [all but aspect, quality and slope]")
        ->delimiter(',')
        ->type_name("NAME,...");
    command->add_option("--above", flags->above, "Also the share of each zone above this value")
        ->type_name("VALUE");
    command->add_option("--cover", flags->cover, "Land cover for the shares of classes")
        ->type_name("FILE");
    command->add_option("--classes", flags->classes, "Class table that names its codes")
        ->type_name("NAME|FILE");
    command
        ->add_option(
            "--slope", flags->slope,
            "Slope in degrees: sums then use the inclined surface [slope.tif of the run's folder]")
        ->type_name("FILE");
    command->add_option("-o,--out", flags->out, "The table")->required()->type_name("OUT.csv");
    command->add_option("--gpkg", flags->geopackage, "The same with the zones' shapes")
        ->type_name("OUT.gpkg");
    add_common_flags(*command, flags->common);
    command->footer(
        "Each pixel counts with the exact share of it inside the zone. Radiation is weighted with, "
        "and summed over, the inclined\n"
        "surface (sums: W for means, GJ for energies); other layers over the map. nodata_share is "
        "the zone's part without a value\n"
        "of the first layer, or beyond the grid. Ranks count from the largest. Percentiles are of "
        "area.\n"
        "Example: sunbudget zones july --polygons parcels.gpkg --id parcel_id --above 600 -o "
        "parcels.csv");
    command->callback([flags] {
        Terminal terminal(flags->common.quiet);
        run_zones(*flags, terminal);
    });
}

}  // namespace sunbudget
