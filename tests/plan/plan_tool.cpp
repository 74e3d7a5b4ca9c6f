// plan_tool schema            prints the JSON Schema
// plan_tool keys              prints every key
// plan_tool verdict FILE...   prints "good" or "bad" for each plan, and every problem
#include <iostream>
#include <string_view>

#include "sunbudget/base/error.hpp"
#include "sunbudget/plan/plan.hpp"

namespace {

void print_verdict(const char* file) {
    try {
        (void)sunbudget::read_plan(file);
        std::cout << "good " << file << '\n';
    } catch (const sunbudget::Error& error) {
        std::cout << "bad " << file << '\n';
        std::cerr << error.what() << '\n';
    }
}

}  // namespace

int main(int count, char** words) {
    const std::string_view mode = count > 1 ? words[1] : "";
    if (mode == "schema") std::cout << sunbudget::plan_schema_json();
    if (mode == "keys") std::cout << sunbudget::plan_help();
    for (int i = 2; mode == "verdict" && i < count; ++i) print_verdict(words[i]);
    return mode == "schema" || mode == "keys" || mode == "verdict" ? 0 : 2;
}
