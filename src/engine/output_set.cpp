#include "sunbudget/engine/output_set.hpp"

#include <fcntl.h>
#include <fmt/format.h>
#include <sys/file.h>
#include <sys/stat.h>
#include <unistd.h>

#include <algorithm>
#include <cerrno>
#include <cstring>
#include <fstream>
#include <span>

#include "sunbudget/base/digest.hpp"
#include "sunbudget/base/error.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/raster/output_file.hpp"

namespace sunbudget {

namespace fs = std::filesystem;

namespace {

constexpr const char* checksum_file = "SHA256SUMS";
constexpr const char* lock_file = ".sunbudget.lock";
constexpr const char* staging_prefix = ".sunbudget-";

[[noreturn]] void cannot(const std::string& what, const fs::path& where,
                         const std::string& todo = {}) {
    throw Error(Cause::output, what + ": " + std::strerror(errno), where.string(), todo);
}

std::string elsewhere(OutputSet::Mark mark) {
    return mark == OutputSet::Mark::checksums ? "name another folder with --out"
                                              : "name another file with --output";
}

std::string read_small(int descriptor) {
    std::string text(200, '\0');
    const auto got = pread(descriptor, text.data(), text.size(), 0);
    text.resize(got > 0 ? static_cast<std::size_t>(got) : 0);
    return std::string(trimmed(text));
}

}  // namespace

OutputSet::OutputSet(fs::path folder, Mark mark) : folder_(std::move(folder)), mark_(mark) {
    if (folder_.empty()) folder_ = ".";
    std::error_code failure;
    made_folder_ = fs::create_directories(folder_, failure);
    if (failure)
        throw Error(Cause::output, "cannot make the output folder: " + failure.message(),
                    folder_.string(), elsewhere(mark_));
    folder_descriptor_ = open(folder_.c_str(), O_RDONLY | O_DIRECTORY | O_CLOEXEC);
    if (folder_descriptor_ < 0) cannot("cannot open the output folder", folder_);
    lock();
    remove_leftovers();
    std::string pattern = (folder_ / (std::string(staging_prefix) + "XXXXXX")).string();
    if (mkdtemp(pattern.data()) == nullptr)
        cannot("cannot write to the output folder", folder_, elsewhere(mark_));
    staging_ = pattern;
}

OutputSet::~OutputSet() {
    std::error_code ignored;
    if (!staging_.empty()) fs::remove_all(staging_, ignored);
    if (lock_descriptor_ >= 0) {
        // Removed while the lock is held: whoever opened the name before us sees a removed file and
        // opens again (see lock()).
        unlinkat(folder_descriptor_, lock_file, 0);
        close(lock_descriptor_);
    }
    if (folder_descriptor_ >= 0) close(folder_descriptor_);
    if (made_folder_) fs::remove(folder_, ignored);  // only when nothing was published into it
}

void OutputSet::lock() {
    const auto where = folder_ / lock_file;
    for (;;) {
        const int descriptor =
            openat(folder_descriptor_, lock_file, O_RDWR | O_CREAT | O_NOFOLLOW | O_CLOEXEC, 0644);
        if (descriptor < 0) cannot("cannot write to the output folder", folder_, elsewhere(mark_));
        if (flock(descriptor, LOCK_EX | LOCK_NB) != 0) {
            const auto holder = read_small(descriptor);
            close(descriptor);
            throw Error(Cause::output, "another run is writing here: " + holder, folder_.string(),
                        "wait for it, or " + elsewhere(mark_));
        }
        struct stat opened {
        }, named{};
        const bool same =
            fstat(descriptor, &opened) == 0 &&
            fstatat(folder_descriptor_, lock_file, &named, AT_SYMLINK_NOFOLLOW) == 0 &&
            opened.st_ino == named.st_ino;
        if (!same) {
            close(descriptor);
            continue;
        }
        lock_descriptor_ = descriptor;
        const auto text = fmt::format("process {}\n", getpid());
        if (ftruncate(descriptor, 0) != 0 ||
            pwrite(descriptor, text.data(), text.size(), 0) != static_cast<ssize_t>(text.size()))
            cannot("cannot write the lock file", where);
        return;
    }
}

void OutputSet::remove_leftovers() const {
    // We hold the lock, so whatever is left in a staging folder belongs to a run that died.
    std::error_code ignored;
    for (const auto& entry : fs::directory_iterator(folder_, ignored)) {
        const auto name = entry.path().filename().string();
        if (name.starts_with(staging_prefix) && name != lock_file && entry.is_directory(ignored) &&
            !entry.is_symlink(ignored))
            fs::remove_all(entry.path(), ignored);
    }
}

fs::path OutputSet::staged(const std::string& name) const {
    return staging_ / name;
}

void OutputSet::write_checksums(const std::vector<std::string>& names) const {
    std::string lines;
    for (const auto& name : names) lines += sha256_of_file(staged(name)) + "  " + name + "\n";
    write_text_file(staged(checksum_file), lines);
}

void OutputSet::publish(const std::vector<std::string>& names) {
    const auto former =
        mark_ == Mark::checksums ? complete_set(folder_) : std::vector<std::string>();
    for (const auto& name : names) OutputFile::open(staged(name), true).sync();
    if (mark_ == Mark::checksums) {
        write_checksums(names);
        if (unlinkat(folder_descriptor_, checksum_file, 0) != 0 && errno != ENOENT)
            cannot("cannot remove the old mark of completeness", folder_ / checksum_file);
        fsync(folder_descriptor_);
    }
    auto order = names;
    if (mark_ == Mark::checksums) order.emplace_back(checksum_file);
    for (const auto& name : order) {
        for (const char* sidecar : {".aux.xml", ".ovr", ".msk"})
            unlinkat(folder_descriptor_, (name + sidecar).c_str(), 0);
        if (name == checksum_file) fsync(folder_descriptor_);
        if (renameat(AT_FDCWD, staged(name).c_str(), folder_descriptor_, name.c_str()) != 0)
            cannot("cannot move the finished file into place", folder_ / name);
    }
    // What an older set had beyond this one would pass for a result of this run.
    for (const auto& name : former)
        if (std::find(names.begin(), names.end(), name) == names.end())
            unlinkat(folder_descriptor_, name.c_str(), 0);
    if (fsync(folder_descriptor_) != 0) cannot("cannot write the folder to the disk", folder_);
    made_folder_ = false;
}

std::vector<std::string> complete_set(const fs::path& folder) {
    std::ifstream list(folder / checksum_file);
    std::vector<std::string> names;
    for (std::string line; std::getline(list, line);) {
        if (line.size() < 67) return {};
        auto name = line.substr(66);
        std::error_code failure;
        if (!fs::is_regular_file(folder / name, failure)) return {};
        names.push_back(std::move(name));
    }
    return names;
}

void write_text_file(const fs::path& file, const std::string& text) {
    auto out = OutputFile::create(file);
    out.write(0, std::as_bytes(std::span(text)));
    out.sync();
}

}  // namespace sunbudget
