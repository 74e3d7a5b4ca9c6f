#include <fmt/format.h>

#include <filesystem>
#include <memory>
#include <nlohmann/json.hpp>

#include "context.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/raster/raster_file.hpp"

namespace sunbudget {

namespace {

using Json = nlohmann::ordered_json;
namespace fs = std::filesystem;

/// What the flags of a one-line job say; each fills a key of a plan.
struct JobFlags {
    std::string cover, classes, default_class, albedo, elevation, like;
    std::vector<std::string> bands;
    std::string sensor, product, scene, quality;
    std::string at, from, to, step, hours, zone, totals, turbidity, unit;
    std::string out;
    std::vector<std::string> set;
    RunFlags run;
    Common common;
};

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

/// "blue=F,red=F": NAME=FILE, and a piece without a name belongs to the file before it.
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

/// A folder, a device or a pipe must not be replaced by a raster.
void refuse_all_but_files(const std::string& out) {
    std::error_code ignored;
    const auto there = fs::symlink_status(out, ignored);
    const bool replaceable = !fs::exists(there) || fs::is_regular_file(there) ||
                             (fs::is_symlink(there) && !fs::is_directory(out, ignored));
    if (!fs::path(out).has_filename() || !replaceable)
        throw Error(Cause::usage, "\"" + out + "\" is no name of a file", "--output",
                    "name the raster to write: OUT.tif");
}

/// The same error with flags for the keys of a plan that the user never saw.
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

/// A job may not write over what it reads.
void refuse_overwriting(const JobFlags& flags) {
    std::vector<std::string> inputs{flags.cover,     flags.classes, flags.albedo,
                                    flags.elevation, flags.like,    flags.quality};
    for (const auto& band : named_bands(flags.bands)) inputs.push_back(band.second);
    if (!flags.scene.empty()) {
        std::error_code ignored;
        for (const auto& entry : fs::directory_iterator(flags.scene, ignored))
            inputs.push_back(entry.path().string());
    }
    for (const auto& [flag, output] :
         {std::pair{"--output", &flags.out}, {"--save-plan", &flags.run.save_plan}})
        for (const auto& input : inputs) {
            std::error_code ignored;
            if (!input.empty() && !output->empty() &&
                fs::equivalent(raster_name(input).path, *output, ignored))
                throw Error(Cause::usage, *output + " is an input of this job", flag,
                            "name another file");
        }
    if (!flags.run.save_plan.empty() && fs::absolute(flags.run.save_plan).lexically_normal() ==
                                            fs::absolute(flags.out).lexically_normal())
        throw Error(Cause::usage, "the plan and the raster have the same name", "--save-plan",
                    "name another file");
}

void add_time_flags(CLI::App& command, JobFlags& flags) {
    command
        .add_option("--elevation", flags.elevation,
                    "Elevation raster, or a height (\"250 m\"), for the air pressure")
        ->type_name("FILE");
    command.add_option("--at", flags.at, "One instant: 2025-06-21T12:00-07:00")->type_name("T");
    command.add_option("--from", flags.from, "First day")->type_name("DAY");
    command.add_option("--to", flags.to, "Last day, included")->type_name("DAY");
    command.add_option("--step", flags.step, "Time step [10 min]")->type_name("STEP");
    command.add_option("--hours", flags.hours, "Daily window: 12-17")->type_name("H-H");
    command
        .add_option("--zone", flags.zone, "UTC, an offset, an IANA name, solar-mean or solar-true")
        ->type_name("ZONE");
    command
        .add_option("--totals", flags.totals,
                    "One band per: whole, day, month, season, year [whole]")
        ->type_name("PERIOD");
    command.add_option("--turbidity", flags.turbidity, "Linke turbidity of the clear sky [3]")
        ->type_name("TL");
    command.add_option("--unit", flags.unit, "W/m2 (mean), MJ/m2 or kWh/m2 (sum) [W/m2]")
        ->type_name("UNIT");
}

void add_surface_flags(CLI::App& command, JobFlags& flags) {
    command.add_option("--cover", flags.cover, "Land-cover raster")->type_name("FILE");
    command
        .add_option("--classes", flags.classes,
                    "Its class table: worldcover, nlcd, corine, lcz or a CSV file")
        ->type_name("TABLE");
    command
        .add_option("--default-class", flags.default_class,
                    "Class for codes that the table does not have")
        ->type_name("CODE");
    command
        .add_option(
            "--bands", flags.bands,
            "Bands of surface reflectance: blue=F,red=F,nir=F,swir1=F,swir2=F (F: PATH, PATH:N)")
        ->type_name("NAME=FILE,...")
        ->expected(1)
        ->take_all()
        ->allow_extra_args(false);
    command
        .add_option("--scene", flags.scene,
                    "Or the folder of a product, whose bands and quality are found by name")
        ->type_name("DIR");
    command
        .add_option("--sensor", flags.sensor,
                    "How their numbers are stored: landsat-oli-c2, or generic (more by --set)")
        ->type_name("NAME");
    command
        .add_option("--product", flags.product,
                    "Declares what they are: surface-reflectance [recognised by names]")
        ->type_name("WHAT");
    command
        .add_option("--quality", flags.quality,
                    "Their quality raster (QA_PIXEL); with --cover such pixels are filled from it")
        ->type_name("FILE");
    command.add_option("--albedo", flags.albedo, "Albedo as given: a raster or a number")
        ->type_name("FILE|NUMBER");
}

/// The plan as it reads in the file it will be saved in. Its output folder is left to the default: a
/// whole run writes more than one file, and shall not do so where a job put its one.
Plan saved_plan(Plan plan, const std::string& file) {
    plan.outputs.directory.reset();
    return parse_plan({file, plan_text(plan, absolute_parent(file)), {}});
}

void add_job(CLI::App& app, const char* name, const char* text, const std::string& layer,
             bool surface, bool light, const char* example) {
    auto flags = std::make_shared<JobFlags>();
    auto* command = app.add_subcommand(name, text);
    if (surface) add_surface_flags(*command, *flags);
    if (light) add_time_flags(*command, *flags);
    command
        ->add_option("-o,--output", flags->out,
                     "The raster to write: one layer, no files beside it")
        ->type_name("OUT.tif")
        ->required();
    command
        ->add_option("--set", flags->set,
                     "Set any other key of the plan behind this job; may be repeated")
        ->type_name("key.path=value")
        ->expected(1)
        ->take_all()
        ->allow_extra_args(false);
    command
        ->add_option("--save-plan", flags->run.save_plan,
                     "Write the plan behind this job, for \"sunbudget run\"")
        ->type_name("PLAN");
    add_common_flags(*command, flags->common);
    command
        ->add_option("--like", flags->like,
                     "A raster whose grid to use [that of the surface, else the elevation]")
        ->type_name("FILE");
    command->footer(fmt::format("Example: {}", example));
    command->callback([flags, layer] {
        Terminal terminal(flags->common.quiet);
        refuse_all_but_files(flags->out);
        refuse_overwriting(*flags);
        flags->run.single_file = flags->out;
        try {
            auto plan = plan_of(*flags, layer);
            // What is written down is what is done: a digest counts files by the names the plan gives them.
            if (const auto& file = flags->run.save_plan; !file.empty())
                plan = saved_plan(std::move(plan), file);
            run_plan(std::move(plan), flags->run, flags->common, terminal);
        } catch (const Error& error) {
            throw in_flags(error);
        }
    });
}

}  // namespace

void add_one_line_jobs(CLI::App& app) {
    add_job(app, "albedo",
            "Albedo from land cover and a class table, or from an image's reflectance", "albedo",
            true, false, "sunbudget albedo --cover cover.tif --classes worldcover -o albedo.tif");
    add_job(app, "insolation", "Clear-sky insolation of flat ground", "insolation", false, true,
            "sunbudget insolation --elevation dem.tif --from 2025-06-01 --to 2025-08-31 --unit "
            "kWh/m2 -o insolation.tif");
    add_job(
        app, "net", "Net shortwave: what the ground keeps of the sun's light", "net_shortwave",
        true, true,
        "sunbudget net --cover cover.tif --classes worldcover --at 2025-06-21T12:00Z -o net.tif");
}

}  // namespace sunbudget
