#pragma once

#include <algorithm>
#include <cassert>
#include <cstddef>
#include <memory>
#include <span>
#include <type_traits>

namespace sunbudget {

namespace detail {

/// Memory for the rows of planes, on 64-byte borders. Large pieces come from the system directly and
/// are kept for the next plane of that size, up to a limit: the heap would scatter them among small
/// pieces and never give them back.
[[nodiscard]] void* take_plane_memory(std::size_t bytes);
void give_plane_memory_back(void* memory, std::size_t bytes) noexcept;

}  // namespace detail

/// A window of pixels: `column` and `row` of its first pixel, and its size.
struct Window {
    long column = 0;
    long row = 0;
    int width = 0;
    int height = 0;

    friend bool operator==(const Window&, const Window&) = default;
};

/// A 2-D array of plain values that owns its memory. Rows start on 64-byte borders and are padded
/// to them, so that every pixel of a row takes the same path through a vector loop.
template <typename T>
class Plane {
    static_assert(std::is_trivially_copyable_v<T>);

  public:
    Plane() = default;
    Plane(int width, int height, T fill = T{}) : width_(width), height_(height) {
        constexpr std::size_t per_line = alignment / sizeof(T);
        stride_ = (static_cast<std::size_t>(width) + per_line - 1) / per_line * per_line;
        const std::size_t count = stride_ * static_cast<std::size_t>(height);
        if (count == 0) return;
        const std::size_t bytes = count * sizeof(T);
        data_ = std::unique_ptr<T[], Free>(static_cast<T*>(detail::take_plane_memory(bytes)),
                                           Free{bytes});
        std::fill_n(data_.get(), count, fill);
    }

    [[nodiscard]] int width() const noexcept { return width_; }
    [[nodiscard]] int height() const noexcept { return height_; }
    [[nodiscard]] bool empty() const noexcept { return data_ == nullptr; }
    /// Distance between rows, in values.
    [[nodiscard]] std::size_t stride() const noexcept { return stride_; }
    [[nodiscard]] T* data() noexcept { return data_.get(); }
    [[nodiscard]] const T* data() const noexcept { return data_.get(); }

    [[nodiscard]] std::span<T> row(int r) noexcept {
        assert(r >= 0 && r < height_);
        return {data_.get() + stride_ * static_cast<std::size_t>(r),
                static_cast<std::size_t>(width_)};
    }
    [[nodiscard]] std::span<const T> row(int r) const noexcept {
        assert(r >= 0 && r < height_);
        return {data_.get() + stride_ * static_cast<std::size_t>(r),
                static_cast<std::size_t>(width_)};
    }
    [[nodiscard]] T& at(int column, int r) noexcept {
        return row(r)[static_cast<std::size_t>(column)];
    }
    [[nodiscard]] T at(int column, int r) const noexcept {
        return row(r)[static_cast<std::size_t>(column)];
    }
    void fill(T value) noexcept {
        std::fill_n(data_.get(), stride_ * static_cast<std::size_t>(height_), value);
    }

  private:
    static constexpr std::size_t alignment = 64;
    struct Free {
        std::size_t bytes = 0;
        void operator()(T* p) const noexcept { detail::give_plane_memory_back(p, bytes); }
    };
    std::unique_ptr<T[], Free> data_;
    std::size_t stride_ = 0;
    int width_ = 0;
    int height_ = 0;
};

}  // namespace sunbudget
