#include "sunbudget/decide/change_table.hpp"
#include "sunbudget/decide/zone_table.hpp"
#include "sunbudget/engine/execute.hpp"

namespace sunbudget {

std::vector<std::string> write_zones(const Run& run, const EngineOptions& options,
                                     const OutputSet& outputs, Execution& execution) {
    if (!run.zones) return {};
    ZoneRasters rasters;
    const auto staged = [&](const std::string& layer) { return outputs.staged(layer + ".tif"); };
    for (const auto& layer : run.zones->layers) rasters.files.push_back(staged(layer));
    for (const auto& layer : run.layers)  // found beside their layers by name
        if (layer.file.name.ends_with("_uncertainty"))
            rasters.files.push_back(staged(layer.file.name));
    if (run.terrain) rasters.slope = staged("slope");
    if (run.zones->cover) rasters.cover = *run.zones->cover;
    for (const auto& use : run.classes) rasters.class_names[use.code] = use.name;
    rasters.above = run.zones->above;

    const auto question = question_about(rasters);
    const auto polygons = read_polygons(run.zones->shapes, run.grid, {run.zones->id, {}});
    const auto answers = zone_answers(question, polygons.all,
                                      {options.threads, [&](double done, double total) {
                                           if (options.progress)
                                               options.progress({"zones", done, total, "Mpixel"});
                                       }});
    const ZoneTable table(question, polygons.all, answers, run.zones->id);
    table.write_csv(outputs.staged("zones.csv"));
    write_features(outputs.staged("zones.gpkg"), run.zones->shapes, "zones", table.columns(),
                   table.rows(), [&](std::size_t row) { return table.row(row); });
    execution.zones = polygons.all.size();
    execution.zone_notes = polygons.notes;
    for (auto& note : zone_notes(question, answers))
        execution.zone_notes.push_back(std::move(note));
    if (run.changes.empty()) return {"zones.csv", "zones.gpkg"};
    const ChangeTable changes(run, question, polygons.all, answers, run.zones->id);
    changes.write_csv(outputs.staged("changes.csv"));
    for (auto& note : changes.notes()) execution.zone_notes.push_back(std::move(note));
    return {"zones.csv", "zones.gpkg", "changes.csv"};
}

}  // namespace sunbudget
