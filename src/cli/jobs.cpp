#include <fmt/format.h>

#include <filesystem>
#include <memory>

#include <CLI/App.hpp>

#include "job_plan.hpp"
#include "sunbudget/raster/raster_file.hpp"

namespace sunbudget {

namespace {

namespace fs = std::filesystem;

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
    add_set_flag(*command, flags->set,
                 "Set any other key of the plan behind this job; may be repeated");
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
