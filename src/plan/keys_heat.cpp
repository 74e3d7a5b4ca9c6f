#include "keys_parts.hpp"
#include "names.hpp"
#include "sunbudget/tables/methods.hpp"

namespace sunbudget {

using namespace forms;

Form longwave_form() {
    auto methods = method_names("longwave");
    methods.push_back("measured");
    for (const auto& name : method_names("longwave_daily")) methods.push_back(name);
    auto laws = method_names("longwave_cloud");
    std::erase(
        laws,
        "crawford-duchon1999");  // its number comes from sunlight, not from a share of the sky
    constexpr double most_w_m2 = 700;  // no sky on Earth sends 500 (common practice)
    return map(
        {{"method",
          {choice(methods)},
          "the clear sky's heat radiation; fao56 and asce2005: the net of whole days after those "
          "papers; default: measured where the table has longwave_down, else " +
              methods.front()},
         {"cloud",
          {number(0, 1), list(number(0, 1), 12, 12), of(ValueKind::raster)},
          "share of the sky, one number, one per month, or a raster (a file with a band for each "
          "period, or one for all); default: the table's cloud, else told from its global "
          "(Crawford & Duchon 1999); without a table that of sky.cloud, else none"},
         {"cloud_method", {choice(laws)}, "what a share of cloud adds; default: " + laws.front()},
         {"down",
          {number(0, most_w_m2), list(number(0, most_w_m2), 12, 12), of(ValueKind::raster)},
          "what the sky sends down to level open ground in W/m2, clouds and all, in the place of a "
          "formula: one number, one per month, or a raster (a file with a band for each period, or "
          "one for all)"}},
        {at_most_one({"down", "method"}), at_most_one({"down", "cloud"}),
         at_most_one({"down", "cloud_method"})});
}

std::vector<Form> surface_temperature_forms() {
    return {temperature(), choice(surface_table_names), list(temperature(), 12, 12),
            map({{"raster", {of(ValueKind::raster)}, "temperature of each pixel"},
                 {"product",
                  {choice(surface_product_names)},
                  "Landsat Collection 2 Level-2: K = stored value * 0.00341802 + 149; default: "
                  "told by the file's name"},
                 {"quality",
                  {of(ValueKind::raster)},
                  "the scene's QA_PIXEL: what lies under clouds and their shadows has no "
                  "temperature; default: that file beside a Landsat raster"},
                 {"unit",
                  {choice({"K", "degC"})},
                  "of the raster; default: as the product or the file says"},
                 {"scale",
                  {number_above(0)},
                  "temperature = stored value * scale + offset, in that unit"},
                 {"offset", {number()}, "see scale"},
                 {"time",
                  {of(ValueKind::instant)},
                  "when it was taken, with its offset from UTC; default: as the product says"},
                 {"covers",
                  {choice(raster_covers_names)},
                  "period-mean: the raster holds the mean of each of the run's periods",
                  "instant"},
                 {"air_plus",
                  {quantity(ValueKind::difference, -50, 80)},
                  "the air's temperature and so much more"},
                 {"from",
                  {choice(heat_source_names)},
                  "steady balance of light, heat radiation and air, of dry built and bare kinds at "
                  "an instant"}},
                {exactly_one({"raster", "air_plus", "from"}), needs("product", {"raster"}),
                 needs("quality", {"raster"}), needs("unit", {"raster"}),
                 needs("scale", {"raster"}), needs("offset", {"raster"}), needs("time", {"raster"}),
                 needs("covers", {"raster"}), at_most_one({"product", "scale"}),
                 at_most_one({"product", "offset"}), at_most_one({"product", "unit"})})};
}

}  // namespace sunbudget
