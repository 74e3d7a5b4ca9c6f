#include "keys_parts.hpp"
#include "names.hpp"
#include "sunbudget/tables/layers.hpp"

namespace sunbudget {

using namespace forms;

Form outputs_form() {
    return map({{"directory", {of(ValueKind::path)}, "folder of all outputs", "out"},
                {"layers",
                 {list(choice(layer_names()), 1, {}, true)},
                 "what to write, one file each",
                 {},
                 true},
                {"unit",
                 {choice(output_unit_names())},
                 "of radiation: the period's mean (W/m2) or its sum (MJ/m2, kWh/m2)",
                 "W/m2"},
                {"format", {choice(format_names)}, "cloud-optimised or plain GeoTIFF", "cog"}});
}

Form zones_form() {
    return map({{"file",
                 {of(ValueKind::path)},
                 "polygons: GeoPackage, GeoJSON, shapefile or FlatGeobuf, in any CRS",
                 {},
                 true},
                {"layer", {of(ValueKind::text)}, "of the file; default: its only one"},
                {"id", {of(ValueKind::text)}, "the field that names a zone, or fid", "fid"},
                {"layers",
                 {list(choice(layer_names()), 1, {}, true)},
                 "layers of the run to give figures of, uncertainties beside them; default: all "
                 "but aspect and quality"},
                {"above",
                 {number()},
                 "also give the share of each zone above this value, in the layers' unit"}});
}

Form report_form() {
    return map({{"html",
                 {of(ValueKind::boolean)},
                 "report.html: maps, curves, tables and sources in one file that opens anywhere",
                 "false"},
                {"layers",
                 {list(choice(layer_names()), 1, {}, true)},
                 "layers of the run to show; default: all of them"}},
               {needs("layers", {"html"})});
}

}  // namespace sunbudget
