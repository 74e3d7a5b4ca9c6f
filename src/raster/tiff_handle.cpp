#include "tiff_handle.hpp"

#include <tiffio.h>

#include <algorithm>
#include <array>
#include <cstdarg>
#include <cstdio>
#include <cstring>

#include "tiff_tags.hpp"

namespace sunbudget {

struct TiffHandle::Source {
    OutputFile* file = nullptr;
    std::span<const std::byte> memory;
    std::string name;
    std::uint64_t position = 0;
    std::string complaint;       ///< the first error libtiff reported
    std::exception_ptr failure;  ///< the first error of ours on libtiff's way to the file

    [[nodiscard]] std::uint64_t size() const { return file ? file->size() : memory.size(); }
    std::size_t read(std::span<std::byte> bytes);
    std::size_t write(std::span<const std::byte> bytes);
};

std::size_t TiffHandle::Source::read(std::span<std::byte> bytes) {
    const auto end = size();
    if (position >= end) return 0;
    bytes = bytes.first(
        static_cast<std::size_t>(std::min<std::uint64_t>(bytes.size(), end - position)));
    if (file)
        file->read(position, bytes);
    else
        std::memcpy(bytes.data(), memory.data() + position, bytes.size());
    position += bytes.size();
    return bytes.size();
}

std::size_t TiffHandle::Source::write(std::span<const std::byte> bytes) {
    file->write(position, bytes);
    position += bytes.size();
    return bytes.size();
}

namespace {
// libtiff is C: no exception may pass through it, so each is kept until `require`.
template <typename Source, typename Work, typename Result>
Result guarded(Source& source, Result on_failure, Work work) noexcept {
    try {
        return work();
    } catch (...) {
        if (!source.failure) source.failure = std::current_exception();
        return on_failure;
    }
}

template <typename Source>
struct Calls {
    static Source& of(thandle_t handle) { return *static_cast<Source*>(handle); }

    static tmsize_t read(thandle_t handle, void* buffer, tmsize_t size) {
        return guarded(of(handle), tmsize_t{-1}, [&] {
            const std::span bytes(static_cast<std::byte*>(buffer), static_cast<std::size_t>(size));
            return static_cast<tmsize_t>(of(handle).read(bytes));
        });
    }
    static tmsize_t write(thandle_t handle, void* buffer, tmsize_t size) {
        return guarded(of(handle), tmsize_t{-1}, [&] {
            const std::span bytes(static_cast<const std::byte*>(buffer),
                                  static_cast<std::size_t>(size));
            return static_cast<tmsize_t>(of(handle).write(bytes));
        });
    }
    static toff_t seek(thandle_t handle, toff_t offset, int whence) {
        return guarded(of(handle), static_cast<toff_t>(-1), [&] {
            const auto base = whence == SEEK_CUR   ? of(handle).position
                              : whence == SEEK_END ? of(handle).size()
                                                   : 0;
            return of(handle).position = base + offset;
        });
    }
    static int close(thandle_t) { return 0; }
    static toff_t size(thandle_t handle) {
        return guarded(of(handle), toff_t{0}, [&] { return toff_t{of(handle).size()}; });
    }
    static int map(thandle_t, void**, toff_t*) { return 0; }
    static void unmap(thandle_t, void*, toff_t) {}

    static int error(TIFF*, void* user, const char*, const char* format, va_list arguments) {
        std::array<char, 512> text{};
        std::vsnprintf(text.data(), text.size(), format, arguments);
        auto& complaint = static_cast<Source*>(user)->complaint;
        if (complaint.empty()) complaint = text.data();
        return 1;  // handled: libtiff prints nothing
    }
    static int warning(TIFF*, void*, const char*, const char*, va_list) { return 1; }
};

struct FreeOptions {
    void operator()(TIFFOpenOptions* options) const noexcept { TIFFOpenOptionsFree(options); }
};
}  // namespace

TiffHandle::TiffHandle(OutputFile& file, const char* mode) : source_(std::make_unique<Source>()) {
    source_->file = &file;
    open(file.path().string(), mode);
}

TiffHandle::TiffHandle(std::span<const std::byte> memory, const std::string& name)
    : source_(std::make_unique<Source>()) {
    source_->memory = memory;
    open(name, "r");
}

TiffHandle::~TiffHandle() {
    if (tiff_) TIFFClose(tiff_);
}

void TiffHandle::open(const std::string& name, const char* mode) {
    using Call = Calls<Source>;
    source_->name = name;
    const std::unique_ptr<TIFFOpenOptions, FreeOptions> options(TIFFOpenOptionsAlloc());
    TIFFOpenOptionsSetErrorHandlerExtR(options.get(), Call::error, source_.get());
    TIFFOpenOptionsSetWarningHandlerExtR(options.get(), Call::warning, source_.get());
    tiff_ =
        TIFFClientOpenExt(name.c_str(), mode, source_.get(), Call::read, Call::write, Call::seek,
                          Call::close, Call::size, Call::map, Call::unmap, options.get());
    require(tiff_ != nullptr, "cannot be opened as a TIFF");
    know_tags();
}

void TiffHandle::require(bool success, const char* what) const {
    if (source_->failure) std::rethrow_exception(source_->failure);
    if (success && source_->complaint.empty()) return;
    const auto reason = source_->complaint.empty() ? "" : ": " + source_->complaint;
    throw Error(Cause::output, what + reason, source_->name);
}

void TiffHandle::close() {
    TIFFClose(tiff_);
    tiff_ = nullptr;
    require(true, "cannot be written");
}

void TiffHandle::know_tags() const {
    const auto field = [](std::uint32_t tag, TIFFDataType type, bool counted, const char* name) {
        return TIFFFieldInfo{tag,
                             -1,
                             -1,
                             type,
                             FIELD_CUSTOM,
                             1,
                             static_cast<unsigned char>(counted),
                             const_cast<char*>(name)};
    };
    static const std::array fields{
        field(tag_pixel_scale, TIFF_DOUBLE, true, "ModelPixelScaleTag"),
        field(tag_tie_points, TIFF_DOUBLE, true, "ModelTiepointTag"),
        field(tag_transformation, TIFF_DOUBLE, true, "ModelTransformationTag"),
        field(tag_geo_keys, TIFF_SHORT, true, "GeoKeyDirectoryTag"),
        field(tag_geo_doubles, TIFF_DOUBLE, true, "GeoDoubleParamsTag"),
        field(tag_geo_text, TIFF_ASCII, false, "GeoAsciiParamsTag"),
        field(tag_gdal_metadata, TIFF_ASCII, false, "GDALMetadata"),
        field(tag_gdal_nodata, TIFF_ASCII, false, "GDALNoDataValue"),
    };
    TIFFMergeFieldInfo(tiff_, fields.data(), static_cast<std::uint32_t>(fields.size()));
}

}  // namespace sunbudget
