#include "sunbudget/raster/output_file.hpp"

#include <fcntl.h>
#include <sys/stat.h>
#include <sys/statvfs.h>
#include <unistd.h>

#include <cerrno>
#include <system_error>
#include <utility>

#include "sunbudget/base/text.hpp"

namespace sunbudget {

namespace {
std::string free_space(const std::filesystem::path& file) {
    const auto folder = file.has_parent_path() ? file.parent_path() : std::filesystem::path(".");
    struct statvfs disk {};
    if (statvfs(folder.c_str(), &disk) != 0) return {};
    const double free = static_cast<double>(disk.f_bavail) * static_cast<double>(disk.f_frsize);
    return ", " + human_bytes(free) + " free there";
}

std::string advice(int system_error) {
    switch (system_error) {
        case ENOSPC:
        case EDQUOT:
            return "free some space and run again";
        case EEXIST:
            return "remove it, or choose another output";
        case ELOOP:
            return "a symbolic link stands at that name: remove it";
        case EACCES:
        case EPERM:
        case EROFS:
            return "check the right to write there, or choose another output";
        case EFBIG:
            return "raise the limit on file size (ulimit -f)";
        default:
            return {};
    }
}
}  // namespace

Error output_error(const std::filesystem::path& file, const std::string& what, int system_error) {
    const auto reason = std::generic_category().message(system_error);
    return {Cause::output, what + ": " + reason + free_space(file), file.string(),
            advice(system_error)};
}

OutputFile::OutputFile(std::filesystem::path path, int descriptor)
    : path_(std::move(path)), descriptor_(descriptor) {}

OutputFile OutputFile::create(const std::filesystem::path& file) {
    const int descriptor =
        ::open(file.c_str(), O_RDWR | O_CREAT | O_EXCL | O_NOFOLLOW | O_CLOEXEC, 0666);
    if (descriptor < 0) throw output_error(file, "cannot make the file", errno);
    return {file, descriptor};
}

OutputFile OutputFile::open(const std::filesystem::path& file, bool writable) {
    // O_NONBLOCK: a pipe at that name must not make us wait for its other end.
    const int flags = (writable ? O_RDWR : O_RDONLY) | O_NOFOLLOW | O_CLOEXEC | O_NONBLOCK;
    const int descriptor = ::open(file.c_str(), flags);
    if (descriptor < 0) throw output_error(file, "cannot open the file", errno);
    OutputFile opened{file, descriptor};
    struct stat status {};
    if (fstat(descriptor, &status) != 0) throw output_error(file, "cannot open the file", errno);
    if (!S_ISREG(status.st_mode))
        throw Error(Cause::output, "not a regular file", file.string(), "remove it");
    return opened;
}

OutputFile::OutputFile(OutputFile&& other) noexcept
    : path_(std::move(other.path_)), descriptor_(std::exchange(other.descriptor_, -1)) {}

OutputFile& OutputFile::operator=(OutputFile&& other) noexcept {
    std::swap(path_, other.path_);
    std::swap(descriptor_, other.descriptor_);
    return *this;
}

OutputFile::~OutputFile() {
    if (descriptor_ >= 0) ::close(descriptor_);
}

void OutputFile::write(std::uint64_t offset, std::span<const std::byte> bytes) {
    while (!bytes.empty()) {
        const auto done =
            ::pwrite(descriptor_, bytes.data(), bytes.size(), static_cast<off_t>(offset));
        if (done < 0 && errno == EINTR) continue;
        if (done <= 0) {
            const int reason = done < 0 ? errno : ENOSPC;
            throw output_error(path_, "cannot write " + std::to_string(bytes.size()) + " bytes",
                               reason);
        }
        bytes = bytes.subspan(static_cast<std::size_t>(done));
        offset += static_cast<std::uint64_t>(done);
    }
}

void OutputFile::read(std::uint64_t offset, std::span<std::byte> bytes) const {
    while (!bytes.empty()) {
        const auto done =
            ::pread(descriptor_, bytes.data(), bytes.size(), static_cast<off_t>(offset));
        if (done < 0 && errno == EINTR) continue;
        if (done < 0) throw output_error(path_, "cannot read back", errno);
        if (done == 0)
            throw Error(Cause::output,
                        "cannot read back: the file ends at byte " + std::to_string(offset) + ", " +
                            std::to_string(bytes.size()) + " bytes too early",
                        path_.string());
        bytes = bytes.subspan(static_cast<std::size_t>(done));
        offset += static_cast<std::uint64_t>(done);
    }
}

std::uint64_t OutputFile::size() const {
    struct stat status {};
    if (fstat(descriptor_, &status) != 0) throw output_error(path_, "cannot ask the size", errno);
    return static_cast<std::uint64_t>(status.st_size);
}

void OutputFile::truncate(std::uint64_t size) {
    if (::ftruncate(descriptor_, static_cast<off_t>(size)) != 0)
        throw output_error(path_, "cannot shorten the file", errno);
}

void OutputFile::sync() {
    if (::fsync(descriptor_) != 0) throw output_error(path_, "cannot be made safe on disk", errno);
}

void OutputFile::close() {
    if (::close(std::exchange(descriptor_, -1)) != 0)
        throw output_error(path_, "cannot close the file", errno);
}

}  // namespace sunbudget
