#include <fmt/format.h>

#include <algorithm>
#include <chrono>
#include <filesystem>
#include <fstream>
#include <iterator>
#include <memory>

#include <CLI/App.hpp>

#include "context.hpp"
#include "sunbudget/base/parallel.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/engine/execute.hpp"
#include "sunbudget/engine/output_set.hpp"
#include "sunbudget/plan/resolve.hpp"
#include "sunbudget/raster/gdal_setup.hpp"
#include "sunbudget/report/report_html.hpp"
#include "sunbudget/report/run_json.hpp"

namespace sunbudget {

namespace fs = std::filesystem;

int Common::threads() const {
    if (threads_text.empty()) return available_threads();
    const auto count = parse_integer(threads_text);
    if (!count || *count < 1 || *count > 1024)
        throw Error(Cause::usage, "\"" + threads_text + "\" is no number of threads", "--threads",
                    "give 1 to 1024");
    return static_cast<int>(*count);
}

std::uint64_t Common::memory_bytes() const {
    constexpr std::uint64_t usual = std::uint64_t{1} << 30, least = std::uint64_t{128} << 20;
    if (memory_text.empty()) return usual;
    const auto bytes = parse_bytes(memory_text);
    if (!bytes || *bytes < least)
        throw Error(Cause::usage, "\"" + memory_text + "\" is no amount of memory from 128M up",
                    "--memory", "write 500M or 2G");
    return *bytes;
}

void add_common_flags(CLI::App& command, Common& common) {
    command
        .add_option("--threads", common.threads_text,
                    "Threads to use [all that the machine grants]")
        ->type_name("N");
    command.add_option("--memory", common.memory_text, "Memory to stay within: 500M, 2G [1G]")
        ->type_name("SIZE");
    command.add_flag("--quiet", common.quiet, "Warnings and errors only; no progress bar");
    command.add_flag("--allow-network", common.allow_network,
                     "Let inputs name GDAL's network and archive paths");
}

void add_set_flag(CLI::App& command, std::vector<std::string>& set, const std::string& text) {
    command.add_option("--set", set, text)
        ->type_name("key.path=value")
        ->expected(1)
        ->take_all()
        ->allow_extra_args(false);
}

void prepare(const Common& common) {
    gdal_setup(raster_cache_bytes(common.memory_bytes()), common.allow_network);
}

namespace {

constexpr const char* report_name = "report.html";

/// Says whether the folder holds this run's results already; throws when it holds another's.
bool already_complete(const fs::path& folder, const Run& run) {
    const auto names = complete_set(folder);
    if (names.empty()) return false;
    // A report that was asked for later is a reason to do it again.
    const bool lacks_report =
        run.report && std::find(names.begin(), names.end(), report_name) == names.end();
    if (lacks_report && recorded_run_digest(folder) == run_digest(run)) return false;
    if (recorded_run_digest(folder) == run_digest(run)) return true;
    throw Error(Cause::output, "the folder holds the results of another run", folder.string(),
                "name another with --out, or replace them with --fresh");
}

void publish_run(const Run& run, const EngineOptions& options, Execution& execution,
                 OutputSet& outputs) {
    std::vector<std::string> names;
    for (const auto& layer : execution.layers) names.push_back(layer.file_name);
    for (auto& name : write_zones(run, options, outputs, execution))
        names.push_back(std::move(name));
    write_text_file(outputs.staged("run.json"), run_json(run, execution));
    names.emplace_back("run.json");
    if (run.report) {
        write_text_file(outputs.staged(report_name), report_html(run, execution, outputs));
        names.emplace_back(report_name);
    }
    outputs.publish(names);
}

void publish_single(const Execution& execution, const fs::path& file, OutputSet& outputs) {
    const auto name = file.filename().string();
    const auto staged = execution.layers.front().file_name;
    if (staged != name) fs::rename(outputs.staged(staged), outputs.staged(name));
    outputs.publish({name});
}

/// A plan that somebody has written is not lost to a slip of the pen; the same plan again is no loss.
void save_plan(const Plan& plan, const fs::path& file) {
    const auto text = plan_text(plan, absolute_parent(file));
    std::ifstream former(file, std::ios::binary);
    if (former) {
        if (std::string(std::istreambuf_iterator<char>(former), {}) == text) return;
        throw Error(Cause::output, "the file is there already and holds something else",
                    file.string(), "name another with --save-plan, or remove it");
    }
    write_text_file(file, text);
}

}  // namespace

fs::path absolute_parent(const fs::path& file) {
    return fs::absolute(file).parent_path();
}

void run_plan(Plan plan, const RunFlags& flags, const Common& common, Terminal& terminal) {
    const auto start = std::chrono::steady_clock::now();
    prepare(common);
    if (!flags.out.empty())
        plan.outputs.directory = Given<PlanPath>{{flags.out, flags.out}, {"--out", 0, ""}};
    const Plan complete = with_defaults(plan);
    const bool single = !flags.single_file.empty();
    const fs::path folder =
        single ? absolute_parent(flags.single_file) : complete.outputs.directory->value.file;

    EngineOptions options{common.threads(), common.memory_bytes(), {}};
    options.progress = [&](const Progress& p) {
        terminal.progress(p.step, p.done, p.total, p.unit);
    };
    const Run run =
        resolve(complete, {options.threads, options.memory_bytes, true, flags.single_file});
    for (const auto& warning : run.warnings) terminal.warning(warning);
    if (!single && !flags.fresh && already_complete(folder, run)) {
        terminal.note(folder.string() +
                      " is complete already for this plan and these inputs: nothing to do (--fresh "
                      "does it again)");
        return;
    }
    if (!flags.save_plan.empty()) save_plan(plan, flags.save_plan);
    OutputSet outputs(folder, single ? OutputSet::Mark::none : OutputSet::Mark::checksums);
    auto execution = execute(run, options, outputs);
    if (single)
        publish_single(execution, flags.single_file, outputs);
    else
        publish_run(run, options, execution, outputs);
    terminal.end_progress();
    for (const auto& warning : closing_warnings(run, execution)) terminal.warning(warning);
    for (const auto& line : summary(run, execution)) terminal.note(line);
    const double seconds =
        std::chrono::duration<double>(std::chrono::steady_clock::now() - start).count();
    const double pixels = static_cast<double>(run.grid.width) * run.grid.height;
    terminal.note(fmt::format("{} in {:.1f} s ({:.3g} Mpixel, {} threads)",
                              single ? flags.single_file : folder.string(), seconds, pixels / 1e6,
                              options.threads));
}

void add_run(CLI::App& app) {
    struct Flags {
        std::string plan;
        std::vector<std::string> set;
        RunFlags run;
        Common common;
    };
    auto flags = std::make_shared<Flags>();
    auto* command = app.add_subcommand(
        "run", "Do the whole run of a plan: read, compute, write rasters, run.json and SHA256SUMS");
    command->add_option("PLAN", flags->plan, "The plan file")->required();
    command->add_option("--out", flags->run.out, "Output folder, instead of the plan's")
        ->type_name("DIR");
    add_set_flag(*command, flags->set,
                 "Change a key of the plan: time.step=\"5 min\"; may be repeated");
    command->add_flag(
        "--fresh", flags->run.fresh,
        "Do it again where the folder holds a complete run; replace another run's results");
    add_common_flags(*command, flags->common);
    command->footer(
        "A folder that already holds this plan's complete results is left as it is, and the run "
        "says so.\n"
        "Example: sunbudget run town.yaml --out july --set time.from=2025-07-01 --set "
        "time.to=2025-07-31");
    command->callback([flags] {
        Terminal terminal(flags->common.quiet);
        run_plan(read_plan(flags->plan, flags->set), flags->run, flags->common, terminal);
    });
}

}  // namespace sunbudget
