#include "job_plan.hpp"

#include <filesystem>
#include <nlohmann/json.hpp>

#include "sunbudget/base/text.hpp"
#include "sunbudget/raster/raster_file.hpp"

namespace sunbudget {

namespace {

using Json = nlohmann::ordered_json;
namespace fs = std::filesystem;

constexpr const char* plan_name = "command line";

/// A number as a number and anything else as text: the plan's own reader judges it.
Json scalar(const std::string& text) {
    if (const auto integer = parse_integer(text)) return *integer;
    if (const auto value = parse_number(text)) return *value;
    return text;
}

void put(Json& map, const char* key, const std::string& text) {
    if (!text.empty()) map[key] = scalar(text);
}

/// Names that stand in the plan's text for those of files, which may hold what no YAML text can: control
/// characters, bytes that are no UTF-8, a colon that is no band.
class StandIns {
  public:
    std::string of(const std::string& file) {
        files_.push_back(file);
        return prefix + std::to_string(files_.size() - 1);
    }
    /// Flags that take a file or something else.
    std::string if_file(const std::string& text) {
        std::error_code ignored;
        return text.find('/') != std::string::npos || fs::exists(raster_name(text).path, ignored)
                   ? of(text)
                   : text;
    }

    void put_back(PlanPath& path) const {
        if (const auto* file = behind(path)) path = {*file, *file};
    }
    void put_back(PlanRaster& raster) const {
        const auto* file = behind(raster.path);
        if (file == nullptr) return;
        const auto name = raster_name(*file);
        raster = {{name.path.string(), name.path},
                  name.band > 0 ? std::to_string(name.band) : name.band_name};
    }
    template <class T>
    void put_back(Maybe<T>& value) const {
        if (value) put_back(value->value);
    }
    template <class... Choices>
    void put_back(std::variant<Choices...>& choice) const {
        std::visit([this](auto& value) { put_back(value); }, choice);
    }
    void put_back(std::vector<PlanRaster>& rasters) const {
        for (auto& raster : rasters) put_back(raster);
    }
    template <class T>
    void put_back(T&) const {}  // no file

  private:
    static constexpr const char* prefix = "./file-of-flag-";
    [[nodiscard]] const std::string* behind(const PlanPath& path) const {
        const std::string_view start = prefix, given = path.given;
        if (!given.starts_with(start)) return nullptr;
        const auto index = parse_integer(given.substr(start.size()));
        return index && *index >= 0 && static_cast<std::size_t>(*index) < files_.size()
                   ? &files_[static_cast<std::size_t>(*index)]
                   : nullptr;
    }
    std::vector<std::string> files_;
};

Json reflectance_of(const JobFlags& flags, StandIns& files) {
    Json image = Json::object();
    put(image, "sensor", flags.sensor);
    for (const auto& [name, file] : named_bands(flags.bands)) {
        if (image["bands"].contains(name))
            throw Error(Cause::usage, "the band " + name + " is given twice", "--bands",
                        "keep one of the two");
        image["bands"][name] = files.of(file);
    }
    for (const auto& [key, text] : {std::pair{"scene", &flags.scene}, {"quality", &flags.quality}})
        if (!text->empty()) image[key] = files.of(*text);
    if (!flags.product.empty()) image["product"] = flags.product;
    return image;
}

Json surface_of(const JobFlags& flags, StandIns& files) {
    Json surface = Json::object();
    if (!flags.cover.empty()) {
        surface["cover"] = {{"raster", files.of(flags.cover)}};
        put(surface["cover"], "classes", files.if_file(flags.classes));
        put(surface["cover"], "default_class", flags.default_class);
    }
    if (parse_number(flags.albedo))
        surface["albedo"]["value"] = scalar(flags.albedo);
    else if (!flags.albedo.empty())
        surface["albedo"]["raster"] = files.of(flags.albedo);
    if (const auto image = reflectance_of(flags, files); !image.empty()) {
        surface["reflectance"] = image;
        if (!flags.cover.empty()) surface["reflectance"]["fill"] = "cover";
    }
    return surface;
}

/// The plan that the flags stand for, as text; JSON is YAML.
std::string plan_text_of(const JobFlags& flags, const std::string& layer, StandIns& files) {
    Json plan{{"sunbudget", 1}};
    if (const auto surface = surface_of(flags, files); !surface.empty()) plan["surface"] = surface;
    if (!flags.like.empty()) plan["grid"]["like"] = files.of(flags.like);
    if (!flags.elevation.empty()) plan["terrain"]["elevation"] = files.if_file(flags.elevation);
    if (!flags.turbidity.empty()) plan["sky"]["turbidity"] = scalar(flags.turbidity);
    Json time = Json::object();
    for (const auto& [key, text] : {std::pair{"at", &flags.at},
                                    {"from", &flags.from},
                                    {"to", &flags.to},
                                    {"step", &flags.step},
                                    {"hours", &flags.hours},
                                    {"zone", &flags.zone},
                                    {"totals", &flags.totals}})
        if (!text->empty()) time[key] = *text;
    if (!time.empty()) plan["time"] = time;
    plan["outputs"]["layers"] = {layer};
    put(plan["outputs"], "unit", flags.unit);
    return plan.dump(-1, ' ', false, Json::error_handler_t::replace);
}

}  // namespace

std::vector<std::pair<std::string, std::string>> named_bands(
    const std::vector<std::string>& flags) {
    std::vector<std::pair<std::string, std::string>> bands;
    for (const auto& flag : flags)
        for (const auto& piece : split(flag, ',')) {
            const auto equals = piece.find('=');
            if (equals != piece.npos && equals > 0 && piece.find('/') > equals)
                bands.emplace_back(piece.substr(0, equals), piece.substr(equals + 1));
            else if (!bands.empty())
                bands.back().second += "," + piece;
            else
                throw Error(Cause::usage, "\"" + piece + "\" names no band", "--bands",
                            "write blue=FILE,red=FILE,...");
        }
    return bands;
}

Plan plan_of(const JobFlags& flags, const std::string& layer) {
    StandIns files;
    // The name has no folder, so that paths are relative to where the command was given.
    Plan plan = parse_plan({plan_name, plan_text_of(flags, layer, files), flags.set});
    if (auto& cover = plan.surface.cover) {
        files.put_back(cover->raster.value);
        files.put_back(cover->classes.value);
    }
    if (auto& albedo = plan.surface.albedo) files.put_back(albedo->raster);
    if (auto& image = plan.surface.reflectance) {
        if (image->bands)
            for (auto& band : image->bands->of) files.put_back(band);
        files.put_back(image->scene);
        files.put_back(image->quality);
    }
    files.put_back(plan.grid.like);
    files.put_back(plan.terrain.elevation);
    return plan;
}

Plan saved_plan(Plan plan, const std::string& file) {
    plan.outputs.directory.reset();
    return parse_plan({file, plan_text(plan, absolute_parent(file)), {}});
}

Error in_flags(const Error& error) {
    static constexpr std::pair<std::string_view, std::string_view> flag_of[] = {
        {"surface.cover.raster", "--cover"},
        {"surface.cover.classes", "--classes"},
        {"surface.cover.default_class", "--default-class"},
        {"surface.albedo.raster", "--albedo"},
        {"surface.albedo.value", "--albedo"},
        {"surface.reflectance.bands", "--bands"},
        {"surface.reflectance.sensor", "--sensor"},
        {"surface.reflectance.product", "--product"},
        {"surface.reflectance.scene", "--scene"},
        {"surface.reflectance.quality", "--quality"},
        {"grid.like", "--like"},
        {"terrain.elevation", "--elevation"},
        {"sky.turbidity", "--turbidity"},
        {"time.at", "--at"},
        {"time.from", "--from"},
        {"time.to", "--to"},
        {"time.step", "--step"},
        {"time.hours", "--hours"},
        {"time.zone", "--zone"},
        {"time.totals", "--totals"},
        {"outputs.unit", "--unit"}};
    const std::string line = std::string(plan_name) + ":1";
    auto problems = error.problems();
    for (auto& problem : problems) {
        if (!problem.where.starts_with(line)) continue;
        auto rest = problem.where.substr(line.size());
        for (const auto& [key, flag] : flag_of)
            if (rest.starts_with(": " + std::string(key)))
                rest.replace(0, 2 + key.size(), " " + std::string(flag));
        problem.where = plan_name + rest;
    }
    return {error.cause(), problems};
}

}  // namespace sunbudget
