#include "town.hpp"

#include <fcntl.h>
#include <sys/file.h>
#include <unistd.h>

#include <stdexcept>

#include "program.hpp"

namespace sunbudget::test {

namespace fs = std::filesystem;

namespace {
const fs::path generator = source_folder() / "pipelines/make_demo_town";

bool is_current(const fs::path& town) {
    if (!fs::exists(town)) return false;
    const auto made = fs::last_write_time(town);
    for (const auto& part : fs::directory_iterator(generator.parent_path() / "town"))
        if (part.is_regular_file() && part.last_write_time() > made) return false;
    return fs::last_write_time(generator) <= made;
}

void make(const fs::path& town) {
    const auto part = town.string() + ".part";
    fs::remove_all(part);
    const auto made =
        shell("PYTHONDONTWRITEBYTECODE=1 /usr/bin/python3 " + word(generator) + " " + word(part));
    if (made.exit_code != 0) throw std::runtime_error("cannot make the demo town: " + made.err);
    fs::remove_all(town);
    fs::rename(part, town);
}
}  // namespace

std::optional<fs::path> demo_town() {
    if (shell("/usr/bin/python3 -c 'import numpy; from osgeo import gdal'").exit_code != 0)
        return std::nullopt;
    const fs::path town = build_folder() / "demo-town";
    // Tests run beside each other: whoever comes second waits.
    const int lock = open((town.string() + ".lock").c_str(), O_RDWR | O_CREAT | O_CLOEXEC, 0644);
    if (flock(lock, LOCK_EX) != 0) throw std::runtime_error("cannot lock the demo town");
    if (!is_current(town)) make(town);
    close(lock);
    return town;
}

}  // namespace sunbudget::test
