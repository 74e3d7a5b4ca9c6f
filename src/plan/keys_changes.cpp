#include "keys_parts.hpp"

namespace sunbudget {

using namespace forms;

Form change_form() {
    const Form where =
        map({{"file", {of(ValueKind::path)}, "polygons, as in zones.file"},
             {"layer", {of(ValueKind::text)}, "of the file; default: its only one"},
             {"query",
              {of(ValueKind::text)},
              "which of them, as in SQL after WHERE: kind = 'flat' AND area_m2 > 100"},
             {"classes",
              {list(integer(0, 65535), 1, {}, true)},
              "only ground of these classes of surface.cover"}},
            {needs("layer", {"file"}), needs("query", {"file"})});
    const Form albedo = map(
        {{"initial", {number(0, 1)}, "when new"},
         {"aged",
          {number(0, 1)},
          "after some years, what the run computes with; default: 0.20 + 0.70 (initial - 0.20)"},
         {"low", {number(0, 1)}, "the least to expect: how much is saved then is written too"},
         {"high", {number(0, 1)}, "the most to expect, likewise"}});
    const Form height =
        map({{"add", {length(-500, 1000)}, "the same everywhere: 8 m, or -8 m"},
             {"attribute", {of(ValueKind::text)}, "a field of the polygons, in metres to add"},
             {"raster",
              {of(ValueKind::raster)},
              "the heights after, in metres; where it has no value nothing changes"}},
            {exactly_one({"add", "attribute", "raster"})});
    return map(
        {{"name",
          {of(ValueKind::text)},
          "letters, digits, - and _: becomes part of file names",
          {},
          true},
         {"where", {where}, "default: everywhere"},
         {"albedo", {albedo}, "of what is treated"},
         {"class",
          {integer(0, 65535)},
          "what the ground turns into, a class of surface.cover's table: its albedo counts, "
          "whether it is dry, and where the run's emissivity is by class also its emissivity"},
         {"emissivity",
          {{.kind = ValueKind::number, .min = 0, .max = 1, .above_min = true}},
          "of what is treated: heat radiation, net radiation, balanced temperature and sri follow"},
         {"height",
          {height},
          "what becomes of the elevation: trees, roofs; shadows and light are worked out anew"},
         {"treatable",
          {{.kind = ValueKind::number, .min = 0, .max = 1, .above_min = true}},
          "share of the place that can be treated",
          "1"},
         {"lifetime", {number_above(0)}, "in years"},
         {"cost",
          {number_above(0)},
          "of each treated square metre of map, in a currency of your own"}},
        {at_most_one({"albedo", "class"})});
}

}  // namespace sunbudget
