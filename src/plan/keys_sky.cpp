#include "keys_parts.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/model/sky.hpp"
#include "sunbudget/tables/methods.hpp"

namespace sunbudget {

using namespace forms;

namespace {

// Ranges and defaults come from the models' own rows.
Key sky_parameter_key(SkyParameter id) {
    const auto name = std::string(name_of(id));
    const auto models = methods_with("clear_sky", name);
    // That of the first model: its range is the widest, its default theirs all.
    const auto& parameter = *method("clear_sky", models.front()).parameter(name);
    const auto& [low, high, low_open] = parameter.allowed;
    const Form one{.kind = ValueKind::number, .min = low, .max = high, .above_min = low_open};
    std::vector<Form> forms{one, list(one, 12, 12)};
    if (may_be_raster(id)) forms.push_back({.kind = ValueKind::raster, .beside_names = true});
    auto doc = parameter.text + (parameter.unit == "1" ? "" : ", " + parameter.unit) +
               "; one number or one per month";
    if (may_be_raster(id)) doc += ", or a raster with one band or one per month";
    return {name, std::move(forms), doc + " (" + joined(models, ", ") + ")",
            parameter.default_value ? shortest(*parameter.default_value) : std::string()};
}

}  // namespace

Form sky_form() {
    const auto models = method_names("clear_sky");
    std::vector<Key> keys{{"model", {choice(models)}, "clear-sky model", models.front()}};
    for (std::size_t i = 0; i < sky_parameter_count; ++i)
        keys.push_back(sky_parameter_key(static_cast<SkyParameter>(i)));
    keys.push_back({"diffuse",
                    {choice(method_names("diffuse_sky"))},
                    "how the sky's light is spread over the sky, for inclined ground",
                    "hay-davies1980"});
    keys.push_back({"uncertainty",
                    {number(0, 1)},
                    "relative standard uncertainty of the light; default: 0.07, what a turbidity "
                    "not fitted to measurements is worth, "
                    "0.05 under a measured sky, 0.10 under clouds"});
    keys.push_back({"cloud",
                    {number(0, 1), list(number(0, 1), 12, 12), of(ValueKind::raster)},
                    "share of the sky under cloud, one number, one per month, or a raster (a file "
                    "with a band for each period, or one "
                    "for all): over a period a mixture of clear and overcast, at an instant Kasten "
                    "& Czeplak 1980"});
    keys.push_back({"overcast",
                    {number(0, 1), list(number(0, 1), 12, 12)},
                    "light under a closed cover as a share of the clear sky's; default: 0.25"});
    keys.push_back({"sunshine",
                    {list(number(0, 24), 12, 12)},
                    "mean hours of sunshine a day for each month: light by Angstrom-Prescott, "
                    "worked out for the middle of the grid"});
    keys.push_back(
        {"angstrom",
         {list(number(0, 1), 2, 2)},
         "[a, b] of global = (a + b n/N) of the light outside the air; default: 0.25 and 0.50"});
    keys.push_back(
        {"index",
         {of(ValueKind::raster), list(of(ValueKind::raster), 1)},
         "clear-sky index, global over the clear sky's: a raster for each period, or one for all"});
    return map(std::move(keys),
               {at_most_one({"cloud", "sunshine"}), at_most_one({"cloud", "index"}),
                at_most_one({"sunshine", "index"}), needs("overcast", {"cloud"}),
                needs("angstrom", {"sunshine"})});
}

}  // namespace sunbudget
