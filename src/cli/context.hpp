#pragma once

#include <cstdint>
#include <filesystem>
#include <memory>
#include <string>
#include <vector>

#include "sunbudget/plan/plan.hpp"
#include "terminal.hpp"

namespace CLI {
class App;
}

namespace sunbudget {

/// Flags that several commands share, one spelling and one meaning each.
struct Common {
    std::string threads_text;
    std::string memory_text;
    bool quiet = false;
    bool allow_network = false;

    /// As given, else what the machine grants. Throws Error(usage).
    [[nodiscard]] int threads() const;
    [[nodiscard]] std::uint64_t memory_bytes() const;
};

void add_common_flags(CLI::App& command, Common& common);
/// --set, for changes of a plan's keys.
void add_set_flag(CLI::App& command, std::vector<std::string>& set,
                  const std::string& text = "Change a key of the plan; may be repeated");

/// Prepares this process for reading rasters: GDAL's set-up and cache.
void prepare(const Common& common);

// One function a command: declares it under `app`; the callback does the work and throws Error.
void add_run(CLI::App& app);
void add_check(CLI::App& app);
void add_explain(CLI::App& app);
void add_one_line_jobs(CLI::App& app);
void add_sun(CLI::App& app);
void add_tables(CLI::App& app);
void add_zones(CLI::App& app);

/// What the run of a plan does once it is read, shared by `run` and the one-line jobs.
struct RunFlags {
    std::string out;          ///< folder; empty: the plan's
    std::string single_file;  ///< one-line jobs: the one file to write, no sidecars
    std::string save_plan;    ///< one-line jobs: a file for the plan, once it has proved good
    bool fresh = false;
};
/// The folder of a file that may be named without one.
[[nodiscard]] std::filesystem::path absolute_parent(const std::filesystem::path& file);
void run_plan(Plan plan, const RunFlags& flags, const Common& common, Terminal& terminal);

}  // namespace sunbudget
