#include <exception>
#include <sstream>

#include <CLI/App.hpp>
#include <CLI/Config.hpp>
#include <CLI/Formatter.hpp>

#include "context.hpp"
#include "process.hpp"
#include "sunbudget/base/parallel.hpp"
#include "sunbudget/base/version.hpp"

namespace {

int shown(const CLI::App& app, const CLI::Success& asked, sunbudget::Terminal& terminal) {
    std::ostringstream text;
    app.exit(asked, text, text);
    try {
        sunbudget::print_result(text.str());
        return 0;
    } catch (const sunbudget::Error& error) {
        terminal.error(error);
        return static_cast<int>(error.cause());
    }
}

}  // namespace

int main(int argc, char** argv) {
    using namespace sunbudget;
    prepare_process();
    CLI::App app{
        "How much of the sun's energy the ground keeps: albedo, insolation and net shortwave "
        "rasters.\n"
        "Screening figures for planning, not design values.",
        "sunbudget"};
    app.set_version_flag("--version", "sunbudget " + std::string(program_version()));
    app.require_subcommand(1);
    app.footer(
        "Example: sunbudget check town.yaml && sunbudget run town.yaml\n"
        "Exit codes: 0 done; 2 command line or plan wrong; 3 input missing or unfit; 4 output "
        "cannot be written;\n"
        "5 partial; 75 try again; 130, 143 stopped by a signal; 1 anything else.");
    add_run(app);
    add_check(app);
    add_explain(app);
    add_one_line_jobs(app);
    add_sun(app);
    add_zones(app);
    add_tables(app);
    Terminal terminal(false);
    try {
        app.parse(argc, argv);
        return 0;
    } catch (const CLI::Success& asked) {
        return shown(app, asked, terminal);  // --help and --version
    } catch (const CLI::ParseError& wrong) {
        terminal.error(wrong.what() + std::string(" (command line): see \"sunbudget --help\""));
        return static_cast<int>(Cause::usage);
    } catch (const Error& error) {
        if (stop_signal.load() != 0) {
            terminal.error(Error(Cause::temporary, "stopped by a signal, nothing was published", {},
                                 "run again"));
            return 128 + stop_signal.load();
        }
        terminal.error(error);
        return static_cast<int>(error.cause());
    } catch (const std::bad_alloc&) {
        terminal.error(Error(Cause::temporary, "out of memory", {}, "lower --threads or --memory"));
        return static_cast<int>(Cause::temporary);
    } catch (const std::exception& error) {
        terminal.error(error.what());
        return static_cast<int>(Cause::internal);
    }
}
