#include "page.hpp"

#include <fmt/format.h>

#include <cmath>
#include <fstream>
#include <limits>

#include "raster/input_support.hpp"
#include "sunbudget/raster/gdal_setup.hpp"
#include "sunbudget/raster/grid_build.hpp"
#include "sunbudget/report/report_html.hpp"
#include "sunbudget/tables/quality.hpp"

namespace sunbudget::test {

namespace {

namespace fs = std::filesystem;
using Pixels = std::function<double(int, int)>;

void add_layer(Run& run, Execution& execution, const OutputSet& outputs, LayerId id,
               const std::string& name, const std::vector<Pixels>& bands) {
    OutputLayer layer{&sunbudget::layer(id), {}, {}};
    auto& file = layer.file;
    file.name = name;
    file.grid = run.grid;
    file.unit = id == LayerId::net_shortwave ? "W/m2" : "1";
    if (id == LayerId::quality) file.sample = Sample::uint16;
    LayerResult result{name + ".tif", {}, 0};
    for (std::size_t b = 0; b < bands.size(); ++b) {
        file.bands.push_back({bands.size() > 1 ? run.times->periods[b].name : name,
                              {{"cell_methods", "time: mean"}}});
        layer.factors.push_back(1);
        if (id != LayerId::quality)
            result.bands.push_back({100, 101, 10, 90, 50.0 + static_cast<double>(b == 1), 5});
    }
    MadeRaster made;
    made.grid = run.grid;
    made.type = id == LayerId::quality ? "UInt16" : "Float32";
    made.bands = bands;
    make_raster(outputs.staged(result.file_name), made);
    run.layers.push_back(std::move(layer));
    execution.layers.push_back(std::move(result));
}

/// Squares side by side, as zones.csv and a file of polygons have them.
void add_zones(Run& run, Execution& execution, const fs::path& folder, const OutputSet& outputs,
               const std::string& note) {
    std::string features,
        csv =
            "parcel,period,map_area_m2,surface_area_m2,nodata_share,one_class_share,net_shortwave_"
            "mean,net_shortwave_sum,"
            "net_shortwave_rank_mean,net_shortwave_rank_sum,net_shortwave__pale__saved_sum\n";
    const auto bounds = bounds_of(run.grid);
    const double side = (bounds.east - bounds.west) / 6;
    for (int i = 0; i < 6; ++i) {
        const auto id = i == 0 ? std::string("<b>&\\\"0") : "parcel " + std::to_string(i);
        const double left = bounds.west + i * side, low = bounds.south, right = left + side,
                     high = low + side;
        features += fmt::format(
            "{}{{\"type\":\"Feature\",\"properties\":{{\"parcel\":\"{}\"}},\"geometry\":{{\"type\":"
            "\"Polygon\",\"coordinates\":[[[{},{}],[{},{}],[{},{}],[{},{}],[{},{}]]]}}}}",
            i == 0 ? "" : ",", id, left, low, right, low, right, high, left, high, left, low);
        for (const auto* period : {"2025-06", "2025-07", "2025-08"})
            csv += fmt::format("{},{},100,101,0,{},{},{},{},{},{}\n", i == 0 ? "\"<b>&\"\"0\"" : id,
                               period, i % 2, 40 + (i * 37) % 11,
                               i == 3 ? std::string() : std::to_string(500 - i), i == 0 ? 6 : i,
                               7 - i, i * 10 - 20);
    }
    std::ofstream(folder / "zones.geojson")
        << "{\"type\":\"FeatureCollection\",\"crs\":{\"type\":\"name\",\"properties\":{\"name\":"
           "\"urn:ogc:def:crs:EPSG::32633\"}},\"features\":["
        << features << "]}";
    std::ofstream(outputs.staged("zones.csv")) << csv;
    run.zones = ZoneTask{{folder / "zones.geojson", {}, {}}, "parcel", {"net_shortwave"}, {}, {}};
    execution.zones = 6;
    execution.zone_notes = {note};
}

}  // namespace

std::string invented_page(const fs::path& folder, const std::string& title, int width, int height) {
    gdal_setup(std::uint64_t{64} << 20);
    Run run;
    run.title = title;
    run.plan_file = "plan.yaml";
    run.plan_digest = "0123";
    run.grid = {width, height, {500000, 2, 0, 5600000, 0, -2}, crs_wkt_of("EPSG:32633")};
    run.times.emplace();
    run.times->periods = periods_of({2025, 6, 1}, {2025, 8, 31}, Totals::month, {}, Zone());
    run.report.emplace();
    run.methods.push_back(&method("clear_sky", "esra2000"));
    run.inputs.push_back({"surface.cover.raster", title, "sha256:00", {title}, 1});
    run.assumptions = {title};
    Execution execution;
    const OutputSet outputs(folder / "out", OutputSet::Mark::checksums);
    const auto net = [&](double month) {
        return [=](int c, int r) {
            return c < width / 10 && r < height / 10
                       ? std::numeric_limits<double>::quiet_NaN()
                       : 200 + 10 * month + 50 * std::sin(c / 40.0) * std::cos(r / 30.0);
        };
    };
    const auto pale = [&](double month) {
        return [=](int c, int r) { return net(month)(c, r) - (c > width / 2 ? 60 : -2); };
    };
    const auto saved = [=](int c, int) { return c > width / 2 ? 60.0 : -2.0; };
    add_layer(run, execution, outputs, LayerId::net_shortwave, "net_shortwave",
              {net(0), net(1), net(2)});
    add_layer(run, execution, outputs, LayerId::net_shortwave, "net_shortwave__pale",
              {pale(0), pale(1), pale(2)});
    add_layer(run, execution, outputs, LayerId::net_shortwave, "net_shortwave__pale__saved",
              {saved, saved, saved});
    add_layer(run, execution, outputs, LayerId::quality, "quality",
              {[](int c, int r) { return (c / 20 + r / 20) % 3; }});
    execution.flags = {{quality::class_table, 100}, {quality::no_surface | quality::cloud, 3}};
    add_zones(run, execution, folder, outputs, title);
    return report_html(run, execution, outputs);
}

}  // namespace sunbudget::test
