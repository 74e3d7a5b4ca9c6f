#pragma once

#include "sunbudget/plan/plan.hpp"

namespace sunbudget {

/// The bands that are named, whatever there is for each.
template <class Bands, class Visitor>
void visit_bands(Bands& bands, Visitor& v) {
    for (std::size_t i = 0; i < plan_band_names.size(); ++i)
        v.value(plan_band_names[i], bands.of[i]);
}

template <class Reflectance, class Visitor>
void visit_reflectance(Reflectance& reflectance, Visitor& v) {
    v.value("sensor", reflectance.sensor);
    v.map("bands", reflectance.bands, [&](auto& bands) { visit_bands(bands, v); });
    v.value("scene", reflectance.scene);
    v.value("scale", reflectance.scale);
    v.value("offset", reflectance.offset);
    v.value("nodata", reflectance.nodata);
    v.value("method", reflectance.method);
    v.map("weights", reflectance.weights, [&](auto& weights) {
        visit_bands(weights.bands, v);
        v.value("constant", weights.constant);
    });
    v.value("quality", reflectance.quality);
    v.value("saturation", reflectance.saturation);
    v.value("aerosol", reflectance.aerosol);
    v.value("reject", reflectance.reject);
    v.value("fill", reflectance.fill);
    v.value("product", reflectance.product);
    v.value("mtl", reflectance.mtl);
    v.value("implausible", reflectance.implausible);
}

/// The quantities of a weather table that are named, whatever there is for each.
template <class Names, class Visitor>
void visit_quantities(Names& names, Visitor& v) {
    for (std::size_t i = 0; i < weather_quantities; ++i) v.value(weather_names[i], names.of[i]);
}

template <class Weather, class Visitor>
void visit_weather(Weather& weather, Visitor& v) {
    v.value("table", weather.table);
    v.map("columns", weather.columns, [&](auto& columns) {
        for (std::size_t i = 0; i < weather_time_names.size(); ++i)
            v.value(weather_time_names[i], columns.of_time[i]);
        visit_quantities(columns, v);
    });
    v.map("units", weather.units, [&](auto& units) { visit_quantities(units, v); });
    v.map("flags", weather.flags, [&](auto& flags) { visit_quantities(flags, v); });
    v.value("good_flags", weather.good_flags);
    v.value("missing", weather.missing);
    v.value("separator", weather.separator);
    v.value("decimal", weather.decimal);
    v.value("header", weather.header);
    v.value("skip", weather.skip);
    v.value("comment", weather.comment);
    v.value("time_form", weather.time_form);
    v.value("stamp", weather.stamp);
    v.duration("interval", weather.interval_s);
    v.value("zone", weather.zone);
    v.value("years", weather.years);
    v.value("gaps", weather.gaps);
    v.value("station", weather.station);
    v.value("station_elevation", weather.station_elevation);
    v.value("air_temperature", weather.air_temperature);
    v.value("air_temperature_max", weather.air_temperature_max);
    v.value("air_temperature_min", weather.air_temperature_min);
    v.value("relative_humidity", weather.relative_humidity);
    v.value("dew_point", weather.dew_point);
    v.value("vapour_pressure", weather.vapour_pressure);
    v.value("lapse", weather.lapse);
    v.value("wind", weather.wind);
    v.value("pressure", weather.pressure);
    v.value("pressure_at", weather.pressure_at);
}

template <class Change, class Visitor>
void visit_change(Change& change, Visitor& v) {
    v.value("name", change.name);
    v.map("where", change.where, [&](auto& where) {
        v.value("file", where.file);
        v.value("layer", where.layer);
        v.value("query", where.query);
        v.value("classes", where.classes);
    });
    v.map("albedo", change.albedo, [&](auto& albedo) {
        v.value("initial", albedo.initial);
        v.value("aged", albedo.aged);
        v.value("low", albedo.low);
        v.value("high", albedo.high);
    });
    v.value("class", change.to_class);
    v.value("emissivity", change.emissivity);
    v.map("height", change.height, [&](auto& height) {
        v.value("add", height.add);
        v.value("attribute", height.attribute);
        v.value("raster", height.raster);
    });
    v.value("treatable", change.treatable);
    v.value("lifetime", change.lifetime);
    v.value("cost", change.cost);
}

/// Names every member of a Plan by its key, once for reading, writing and filling in defaults.
/// A visitor has `value(name, member)`, `duration(name, member)`, `map(name, visit_inside)` and
/// `list(name, members, visit_inside)` for a list of maps.
template <class P, class Visitor>
void visit_plan(P& plan, Visitor& v) {
    v.value("title", plan.title);
    v.map("grid", [&] {
        v.value("like", plan.grid.like);
        v.value("crs", plan.grid.crs);
        v.value("bounds", plan.grid.bounds);
        v.value("cell", plan.grid.cell);
    });
    v.map("surface", [&] {
        v.map("cover", plan.surface.cover, [&](auto& cover) {
            v.value("raster", cover.raster);
            v.value("classes", cover.classes);
            v.value("default_class", cover.default_class);
        });
        v.map("reflectance", plan.surface.reflectance,
              [&](auto& reflectance) { visit_reflectance(reflectance, v); });
        v.map("albedo", plan.surface.albedo, [&](auto& albedo) {
            v.value("raster", albedo.raster);
            v.value("scale", albedo.scale);
            v.value("offset", albedo.offset);
            v.value("value", albedo.value);
            v.value("uncertainty", albedo.uncertainty);
        });
        v.value("emissivity", plan.surface.emissivity);
    });
    v.map("terrain", [&] {
        v.value("elevation", plan.terrain.elevation);
        v.value("unit", plan.terrain.unit);
        v.value("slope_from", plan.terrain.slope_from);
        v.value("directions", plan.terrain.directions);
        v.value("reach", plan.terrain.reach);
    });
    v.map("sky", [&] {
        v.value("model", plan.sky.model);
        for (std::size_t i = 0; i < sky_parameter_count; ++i)
            v.value(name_of(static_cast<SkyParameter>(i)).data(), plan.sky.parameters[i]);
        v.value("diffuse", plan.sky.diffuse);
        v.value("uncertainty", plan.sky.uncertainty);
        v.value("cloud", plan.sky.cloud);
        v.value("overcast", plan.sky.overcast);
        v.value("sunshine", plan.sky.sunshine);
        v.value("angstrom", plan.sky.angstrom);
        v.value("index", plan.sky.index);
    });
    v.map("weather", plan.weather, [&](auto& weather) { visit_weather(weather, v); });
    v.map("longwave", [&] {
        v.value("method", plan.longwave.method);
        v.value("cloud", plan.longwave.cloud);
        v.value("cloud_method", plan.longwave.cloud_method);
        v.value("down", plan.longwave.down);
    });
    v.value("surface_temperature", plan.surface_temperature);
    v.map("time", [&] {
        v.value("at", plan.time.at);
        v.value("from", plan.time.from);
        v.value("to", plan.time.to);
        v.duration("step", plan.time.step_s);
        v.value("hours", plan.time.hours);
        v.value("zone", plan.time.zone);
        v.value("totals", plan.time.totals);
        v.value("days", plan.time.days);
    });
    v.map("outputs", [&] {
        v.value("directory", plan.outputs.directory);
        v.value("layers", plan.outputs.layers);
        v.value("unit", plan.outputs.unit);
        v.value("format", plan.outputs.format);
    });
    v.map("zones", plan.zones, [&](auto& zones) {
        v.value("file", zones.file);
        v.value("layer", zones.layer);
        v.value("id", zones.id);
        v.value("layers", zones.layers);
        v.value("above", zones.above);
    });
    v.list("changes", plan.changes, [&](auto& change) { visit_change(change, v); });
    v.map("report", [&] {
        v.value("html", plan.report.html);
        v.value("layers", plan.report.layers);
    });
    v.map("engine", [&] { v.value("tile", plan.engine.tile); });
}

}  // namespace sunbudget
