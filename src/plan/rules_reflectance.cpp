#include <algorithm>

#include "reflectance.hpp"
#include "rules_parts.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/tables/sensors.hpp"

namespace sunbudget {

namespace {

/// What an image's sensor, weights and quality bits ask of each other.
class ReflectanceRules : Rules {
  public:
    using Rules::Rules;
    void all() const {
        if (plan_.surface.reflectance) reflectance(*plan_.surface.reflectance);
    }

  private:
    void reflectance(const PlanReflectance& image) const;
    void fill(const PlanReflectance& image) const;
    void weights(const PlanReflectance& image) const;
    void quality_tests(const PlanReflectance& image) const;
    void quality_test(const PlanReflectance& image, const std::string& name) const;
    /// Written, and wrong by itself.
    [[nodiscard]] bool image_is_bad(const char* key) const;
};

void ReflectanceRules::reflectance(const PlanReflectance& image) const {
    fill(image);
    if (!written("surface.reflectance.sensor") || image_is_bad("sensor")) return;
    const bool has_names = !sensor(*image.sensor).bands.front().product.empty();
    if (image.scene && !has_names)
        mistakes_.add(image.scene->place,
                      "files of the sensor " + *image.sensor + " have no names to find them by",
                      "name the bands one by one");
    weights(image);
    quality_tests(image);
}

void ReflectanceRules::fill(const PlanReflectance& image) const {
    const bool from_cover = image.fill && **image.fill == FillFrom::cover;
    if (from_cover && !written("surface.cover"))
        mistakes_.add(image.fill->place, "there is no land cover to fill from",
                      "add surface.cover, or write fill: nodata");
    if (!from_cover && written("surface.cover") && !image_is_bad("fill"))
        mistakes_.add(image.place,
                      "both cover and reflectance are given, and nothing fills from the cover",
                      "write fill: cover, or keep one of the two");
}

bool ReflectanceRules::image_is_bad(const char* key) const {
    const auto* node = root_.find("surface")->find("reflectance")->find(key);
    return node != nullptr && node->bad;
}

void ReflectanceRules::weights(const PlanReflectance& image) const {
    if (image.weights) {
        const auto& given = image.weights->bands.of;
        if (std::ranges::none_of(given, [](const auto& weight) { return weight && **weight != 0; }))
            mistakes_.add(image.weights->bands.place, "no band has a weight",
                          "give the weight of each band: {red: 0.5, nir: 0.5, constant: 0}");
        return;
    }
    if (written("surface.reflectance.weights")) return;
    const auto names = weight_set_names(*image.sensor);
    if (names.empty())
        mistakes_.add(image.method ? image.method->place : image.place,
                      "the sensor " + *image.sensor + " has no weights of its own",
                      "add weights, such as weights: {red: 0.5, nir: 0.5, constant: 0}");
    else if (image.method && std::ranges::find(names, **image.method) == names.end())
        mistakes_.add(image.method->place,
                      "no weights \"" + **image.method + "\" for the sensor " + *image.sensor,
                      suggestion(**image.method, names));
}

// Each key, and the raster of the product that it stands for.
void ReflectanceRules::quality_tests(const PlanReflectance& image) const {
    const auto& tests = sensor(*image.sensor).tests;
    for (const auto& [key, product, given] : quality_rasters(image)) {
        if (!*given || std::ranges::find(tests, product, &QualityTest::raster) != tests.end())
            continue;
        mistakes_.add(
            (*given)->place,
            "the bits of this raster have no known meaning for the sensor " + *image.sensor,
            "leave it out");
    }
    if (!image.reject) return;
    for (const auto& name : **image.reject) quality_test(image, name);
}

void ReflectanceRules::quality_test(const PlanReflectance& image, const std::string& name) const {
    const auto& tests = sensor(*image.sensor).tests;
    const auto test = std::ranges::find(tests, name, &QualityTest::name);
    if (test == tests.end())
        return mistakes_.add(image.reject->place,
                             "the sensor " + *image.sensor + " has no quality bits for " + name,
                             "leave it out");
    for (const auto& [key, product, given] : quality_rasters(image))
        if (product == test->raster && !*given && !image.scene &&
            !written(std::string("surface.reflectance.") + key))
            mistakes_.add(image.reject->place,
                          name + " is told by " + product + ", which the plan does not name",
                          std::string("add ") + key + ", or leave it out");
}

}  // namespace

void check_reflectance(const Plan& plan, const Node& root, Mistakes& mistakes) {
    ReflectanceRules(plan, root, mistakes).all();
}

}  // namespace sunbudget
