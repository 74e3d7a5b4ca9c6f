#include <fmt/format.h>

#include <chrono>
#include <memory>

#include <CLI/App.hpp>

#include "context.hpp"
#include "sunbudget/engine/estimate.hpp"
#include "sunbudget/plan/check.hpp"
#include "sunbudget/plan/resolve.hpp"

namespace sunbudget {

void add_check(CLI::App& app) {
    struct Flags {
        std::string plan;
        std::vector<std::string> set;
        bool full = false;
        Common common;
    };
    auto flags = std::make_shared<Flags>();
    auto* command = app.add_subcommand(
        "check", "Validate a plan and its inputs, show the resolved run and what it will take");
    command->add_option("PLAN", flags->plan, "The plan file")->required();
    add_set_flag(*command, flags->set);
    command->add_flag("--full", flags->full,
                      "Count the classes of every pixel, not of a sample of blocks");
    add_common_flags(*command, flags->common);
    command->footer(
        "Nothing is written. Time, memory and disk come from a few windows computed for the "
        "purpose.\n"
        "Example: sunbudget check town.yaml --full");
    command->callback([flags] {
        Terminal terminal(flags->common.quiet);
        prepare(flags->common);
        const EngineOptions options{flags->common.threads(), flags->common.memory_bytes(), {}};
        const auto start = std::chrono::steady_clock::now();
        const Run run = resolve(read_plan(flags->plan, flags->set),
                                {options.threads, options.memory_bytes, flags->full, {}});
        for (const auto& warning : run.warnings) terminal.warning(warning);
        const double resolving_s =
            std::chrono::duration<double>(std::chrono::steady_clock::now() - start).count();
        auto estimated = estimate(run, options);
        estimated.seconds += resolving_s;  // a run does that too
        const auto text = check_text(run, estimated, flags->full);
        print_result(text);
    });
}

}  // namespace sunbudget
