#include <algorithm>
#include <cassert>

#include "keys_parts.hpp"
#include "names.hpp"
#include "sunbudget/base/text.hpp"

namespace sunbudget {

using namespace forms;

namespace {

Form grid_form() {
    return map(
        {{"like",
          {choice(like_names), path_beside_names()},
          "the raster whose grid the outputs take; bounds and cell beside it crop or coarsen it"},
         {"crs", {of(ValueKind::text)}, "coordinate reference system, such as EPSG:32633"},
         {"bounds", {list(number(), 4, 4)}, "[west, south, east, north] in the CRS's unit"},
         {"cell", {number_above(0)}, "side of a pixel in the CRS's unit"}},
        {at_most_one({"like", "crs"}), needs("crs", {"bounds", "cell"})});
}

Form period_form() {
    return map({{"name", {of(ValueKind::text)}, "becomes the band's description", {}, true},
                {"from", {of(ValueKind::date)}, "first day", {}, true},
                {"to", {of(ValueKind::date)}, "last day, inclusive", {}, true}});
}

Form time_form() {
    return map(
        {{"at", {of(ValueKind::instant)}, "one instant, with its offset from UTC or in the zone"},
         {"from", {of(ValueKind::date)}, "first day"},
         {"to", {of(ValueKind::date)}, "last day, inclusive"},
         {"step", {duration(60, 3600)}, "between two positions of the sun", "10 min"},
         {"hours", {of(ValueKind::hours)}, "only this part of each day; default: the whole day"},
         {"zone",
          {of(ValueKind::zone)},
          "what days and hours mean: UTC, an offset, an IANA name, solar-mean or solar-true",
          "solar-mean"},
         {"totals",
          {choice(totals_names), list(period_form(), 1)},
          "one band for each of these periods",
          "whole"},
         {"days",
          {choice(day_names)},
          "every day, or one day for each month weighted by the month's length (Klein 1977; not "
          "beyond 60 degrees)",
          "all"}},
        {exactly_one({"at", "from"}), needs("from", {"to"}), needs("to", {"from"}),
         needs("step", {"from"}), needs("hours", {"from"}), needs("totals", {"from"}),
         needs("days", {"from"})});
}

Form engine_form() {
    return map({{"tile",
                 {{.kind = ValueKind::integer, .choices = {"128", "256", "512", "1024"}}},
                 "side of a file's tile in pixels",
                 "512"}});
}

}  // namespace

const Form& plan_form() {
    static const Form form =
        map({{"sunbudget", {integer(1, 1)}, "version of the plan's format", {}, true},
             {"title", {of(ValueKind::text)}, "for reports and metadata"},
             {"grid", {grid_form()}, "default: the surface raster's grid, else the elevation's"},
             {"surface", {surface_form()}, "where albedo comes from"},
             {"terrain", {terrain_form()}, "default: flat ground at 0 m"},
             {"sky", {sky_form()}, "the cloudless atmosphere"},
             {"weather", {weather_form()}, "what was measured, or the air in numbers"},
             {"longwave", {longwave_form()}, "heat radiation of the sky"},
             {"surface_temperature", surface_temperature_forms(),
              "of the ground: one, one per month, table (the weather's column), or one of raster, "
              "air_plus and from"},
             {"time", {time_form()}, "needed by every layer of radiation"},
             {"outputs", {outputs_form()}, "what to write", {}, true},
             {"zones",
              {zones_form()},
              "parcels, blocks or wards to give figures of, in zones.csv and zones.gpkg"},
             {"changes", {list(change_form(), 1)}, "what-ifs, computed beside the run as it is"},
             {"report", {report_form()}, "what people read of the run"},
             {"engine", {engine_form()}, "rarely needed"}});
    return form;
}

const Key& plan_key(std::string_view path) {
    const std::vector<Key>* keys = &plan_form().keys;
    const Key* key = nullptr;
    for (const auto& name : split(path, '.')) {
        const auto found = std::ranges::find(*keys, name, &Key::name);
        assert(found != keys->end());
        key = &*found;
        const auto& form = key->forms.front();
        keys = form.kind == ValueKind::list ? &form.items.front().keys : &form.keys;
    }
    return *key;
}

std::vector<std::string> names_of(const std::vector<Key>& keys) {
    std::vector<std::string> names;
    for (const auto& key : keys) names.push_back(key.name);
    return names;
}

}  // namespace sunbudget
