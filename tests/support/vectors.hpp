#pragma once

#include <filesystem>
#include <map>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

namespace sunbudget::test {

/// A CSV of published values: `#` lines in front, a header, quoted cells allowed.
struct Table {
    std::vector<std::string> comments;
    std::vector<std::string> columns;
    std::vector<std::vector<std::string>> rows;

    [[nodiscard]] std::size_t column(std::string_view name) const;
    [[nodiscard]] const std::string& cell(std::size_t row, std::string_view column_name) const;
    /// The cell as a number; fails the test when it is none.
    [[nodiscard]] double number(std::size_t row, std::string_view column_name) const;
};

/// Reads testdata/NAME (a path below testdata). Throws std::runtime_error when it is missing or empty.
[[nodiscard]] Table read_table(const std::string& name);

/// The checkout.
[[nodiscard]] std::filesystem::path source_folder();
[[nodiscard]] std::filesystem::path testdata(const std::string& name);

/// A file below the folder of real data named by SUNBUDGET_DATA; nothing when it is not set. A test
/// that needs it says `SKIP_WITHOUT_DATA(file)`.
[[nodiscard]] std::optional<std::filesystem::path> real_data(const std::string& name);

/// A new empty folder, removed with the object.
class TemporaryFolder {
  public:
    TemporaryFolder();
    ~TemporaryFolder();
    TemporaryFolder(const TemporaryFolder&) = delete;
    TemporaryFolder& operator=(const TemporaryFolder&) = delete;
    [[nodiscard]] const std::filesystem::path& path() const { return path_; }

  private:
    std::filesystem::path path_;
};

}  // namespace sunbudget::test

/// Ends the test case with a plain message when the folder of real data is not there.
#define SUNBUDGET_NEEDS_DATA()                                                             \
    do {                                                                                   \
        if (!::sunbudget::test::real_data("README.md")) {                                  \
            WARN("SKIPPED: SUNBUDGET_DATA does not name the folder of real test rasters"); \
            return;                                                                        \
        }                                                                                  \
    } while (false)
