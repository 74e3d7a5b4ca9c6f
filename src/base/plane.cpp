#include "sunbudget/base/plane.hpp"

#include <sys/mman.h>

#include <bit>
#include <map>
#include <mutex>
#include <new>
#include <vector>

namespace sunbudget::detail {

namespace {

constexpr std::size_t large_bytes = 128u << 10;
constexpr std::size_t kept_at_most = 64u << 20;
constexpr std::align_val_t row_border{64};

struct Kept {
    std::mutex mutex;
    std::map<std::size_t, std::vector<void*>> by_size;
    std::size_t bytes = 0;
};

/// Pieces come in eight sizes for each power of two, so that planes of nearly one size share them.
std::size_t rounded_up(std::size_t bytes) {
    const std::size_t step = std::bit_floor(bytes) / 8;
    return (bytes + step - 1) / step * step;
}

/// Never destroyed: planes may outlive the end of main.
Kept& kept() {
    static auto* pool = new Kept;
    return *pool;
}

}  // namespace

void* take_plane_memory(std::size_t bytes) {
    if (bytes < large_bytes) return ::operator new(bytes, row_border);
    bytes = rounded_up(bytes);
    {
        auto& pool = kept();
        const std::lock_guard hold(pool.mutex);
        if (auto found = pool.by_size.find(bytes);
            found != pool.by_size.end() && !found->second.empty()) {
            void* memory = found->second.back();
            found->second.pop_back();
            pool.bytes -= bytes;
            return memory;
        }
    }
    void* memory = mmap(nullptr, bytes, PROT_READ | PROT_WRITE, MAP_PRIVATE | MAP_ANONYMOUS, -1, 0);
    if (memory == MAP_FAILED) throw std::bad_alloc();
    return memory;
}

void give_plane_memory_back(void* memory, std::size_t bytes) noexcept {
    if (bytes < large_bytes) {
        ::operator delete(memory, row_border);
        return;
    }
    bytes = rounded_up(bytes);
    auto& pool = kept();
    const std::lock_guard hold(pool.mutex);
    if (pool.bytes + bytes <= kept_at_most) {
        try {
            pool.by_size[bytes].push_back(memory);
            pool.bytes += bytes;
            return;
        } catch (const std::bad_alloc&) {
            // No room to remember it: the system gets it back below.
        }
    }
    munmap(memory, bytes);
}

}  // namespace sunbudget::detail
