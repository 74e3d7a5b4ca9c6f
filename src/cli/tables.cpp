#include <fmt/format.h>

#include <memory>

#include <CLI/App.hpp>

#include "context.hpp"
#include "sunbudget/tables/print.hpp"

namespace sunbudget {

namespace {

std::string list_of_tables() {
    std::string text;
    for (const auto& name : table_names())
        text += fmt::format("{:<12} {}\n", name, table_text(name));
    return text + fmt::format("{:<12} {}\n{:<12} {}\n", "plan",
                              "every key of a plan, as a commented plan", "plan-schema",
                              "the plan's JSON Schema");
}

std::string table(const std::string& name, TableFormat format) {
    if (name.empty()) return list_of_tables();
    if (name == "plan") return plan_help();
    if (name == "plan-schema") return plan_schema_json();
    return printed_table(name, format);
}

}  // namespace

void add_tables(CLI::App& app) {
    struct Flags {
        std::string name;
        bool csv = false;
        bool json = false;
    };
    auto flags = std::make_shared<Flags>();
    auto* command = app.add_subcommand(
        "tables", "Print class tables, sensors, methods, layers and the plan's keys, with sources");
    command->add_option(
        "NAME", flags->name,
        "Which table, or the path of a class table of your own [the list of tables]");
    auto* csv = command->add_flag("--csv", flags->csv,
                                  "As CSV: the starting point of a class table of your own");
    command->add_flag("--json", flags->json, "As JSON")->excludes(csv);
    command->footer("Example: sunbudget tables worldcover --csv > my-classes.csv");
    command->callback([flags] {
        const auto format = flags->csv    ? TableFormat::csv
                            : flags->json ? TableFormat::json
                                          : TableFormat::text;
        const auto text = table(flags->name, format);
        print_result(text);
    });
}

}  // namespace sunbudget
