#include <memory>

#include <CLI/App.hpp>

#include "context.hpp"
#include "sun_text.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/tables/methods.hpp"

namespace sunbudget {

namespace {

constexpr const char* footer =

    "Times are printed in UTC. sunrise and sunset are of the sun's centre on a flat horizon, "
    "without refraction;\n"
    "sunrise_apparent and sunset_apparent of its upper limb with mean refraction, as almanacs "
    "have them.\n"
    "beam_w_m2 is on a plane facing the sun, direct_mj_m2 and the rest on the horizontal; "
    "on_slope is all light on\n"
    "a square metre of the slope. A clear-sky number may be one or twelve (1,2,..,12), one for "
    "each month.\n"
    "--fit prints the median of a month's clear hours; two thirds of them lie between low and "
    "high.\n"
    "Example: sunbudget sun --at 40,-105 --time 2025-06-21T12:00-07:00\n"
    "         sunbudget sun --at 40,-105 --from 2025-01-01 --to 2025-12-31 --csv\n"
    "         sunbudget sun --at 40,-105 --from 2025-12-21 --zone solar-true --slope 30 "
    "--azimuth 180 --plot\n"
    "         sunbudget sun --at 40.05,-88.37 --height 213 --fit station.csv";

/// --time, which --from, --to, --step and --fit exclude.
CLI::Option* add_time_flags(CLI::App& command, SunFlags& flags) {
    auto* time = command
                     .add_option("--time", flags.time,
                                 "One instant: 2025-06-21T12:00-07:00, or without offset in --zone")
                     ->type_name("T");
    command.add_option("--from", flags.from, "First day of a table")
        ->type_name("DAY")
        ->excludes(time);
    command.add_option("--to", flags.to, "Last day, included [that of --from]")
        ->type_name("DAY")
        ->excludes(time);
    command
        .add_option(
            "--step", flags.step,
            "Step of the table: 10 min, 1 h, 1 d [1 d: a row a day with sunrise and totals]")
        ->type_name("STEP")
        ->excludes(time);
    command
        .add_option("--zone", flags.zone,
                    "UTC, an offset, an IANA name, solar-mean or solar-true [UTC]")
        ->type_name("ZONE");
    return time;
}

/// The flags of the clear-sky model, made from its row like all else about it.
void add_sky_flags(CLI::App& command, SunFlags& flags) {
    command
        .add_option("--model", flags.model,
                    "Clear sky: " + joined(method_names("clear_sky"), ", ") + " [esra2000]")
        ->type_name("NAME");
    for (std::size_t i = 0; i < sky_parameter_count; ++i) {
        const auto id = static_cast<SkyParameter>(i);
        if (id == SkyParameter::ground_albedo) continue;  // --albedo
        const auto models = methods_with("clear_sky", name_of(id));
        const auto* parameter = method("clear_sky", models.back()).parameter(name_of(id));
        command
            .add_option(flag_of(id), flags.sky[i],
                        joined(models, ", ") + ": " + parameter->text + " [" +
                            shortest(*parameter->default_value) +
                            (parameter->unit == "1" ? "]" : " " + parameter->unit + "]"))
            ->type_name("X");
    }
    command
        .add_option("--diffuse", flags.diffuse,
                    "How the sky's light is spread, for a slope: " +
                        joined(method_names("diffuse_sky"), ", ") + " [hay-davies1980]")
        ->type_name("NAME");
}

void add_ground_flags(CLI::App& command, SunFlags& flags) {
    command.add_option("--slope", flags.slope, "Slope of the ground in degrees, for on_slope [0]")
        ->type_name("DEG");
    command
        .add_option("--azimuth", flags.azimuth,
                    "Where the slope faces, downslope, clockwise from north: 180 is south")
        ->type_name("DEG");
    command
        .add_option("--albedo", flags.albedo,
                    "Of the ground around: what a slope sees of it, and what lights the sky where "
                    "the model counts that [0.2]")
        ->type_name("A");
}

void add_form_flags(CLI::App& command, SunFlags& flags) {
    auto* csv = command.add_flag("--csv", flags.csv, "As CSV");
    auto* json =
        command.add_flag("--json", flags.json, "As JSON: an array of objects, units in the names")
            ->excludes(csv);
    command
        .add_flag("--plot", flags.plot,
                  "The day's curve in letters, for the day of --from or --time")
        ->excludes(csv)
        ->excludes(json);
}

}  // namespace

void add_sun(CLI::App& app) {
    auto flags = std::make_shared<SunFlags>();
    auto* command = app.add_subcommand(
        "sun",
        "Sun position and clear-sky light at a place: an instant, or a table of days or steps");
    command->add_option("--at", flags->at, "Place in degrees, north and east positive")
        ->type_name("LAT,LON")
        ->required();
    auto* time = add_time_flags(*command, *flags);
    command->add_option("--height", flags->height, "Height of the place in metres [0]")
        ->type_name("M");
    add_sky_flags(*command, *flags);
    add_ground_flags(*command, *flags);
    command
        ->add_option("--fit", flags->fit,
                     "Linke turbidity of each month from the clear hours of a record: a table "
                     "whose header names quantities and units "
                     "(global [W/m2]), or a plan (*.yaml) whose weather says how to read one")
        ->type_name("TABLE")
        ->excludes(time);
    add_form_flags(*command, *flags);
    command->footer(footer);
    command->callback([flags] {
        Terminal terminal(false);
        print_result(sun_text(*flags, terminal));
    });
}

}  // namespace sunbudget
