#pragma once

#include <cstddef>
#include <cstdint>
#include <filesystem>
#include <memory>
#include <span>
#include <string>
#include <string_view>

namespace sunbudget {

/// SHA-256 in pieces (OpenSSL).
class Sha256 {
  public:
    Sha256();
    ~Sha256();
    Sha256(Sha256&&) noexcept;
    Sha256& operator=(Sha256&&) noexcept;
    void add(std::span<const std::byte> bytes);
    void add(std::string_view text);
    /// 64 hexadecimal digits; the object may not be used afterwards.
    [[nodiscard]] std::string hex();

  private:
    struct State;
    std::unique_ptr<State> state_;
};

[[nodiscard]] std::string sha256_of(std::string_view text);
/// SHA-256 of a whole file. Throws Error(input) when it cannot be read.
[[nodiscard]] std::string sha256_of_file(const std::filesystem::path& file);

/// How an input file is named in metadata: "sha256:..." of the whole file up to 64 MB; above that
/// "sampled-sha256:..." of the size and of 64 blocks of 64 kB spread evenly from first to last.
/// Throws Error(input).
[[nodiscard]] std::string input_digest(const std::filesystem::path& file);

/// XXH3, 64 bits: the checksum of a tile.
[[nodiscard]] std::uint64_t tile_checksum(std::span<const std::byte> bytes) noexcept;

}  // namespace sunbudget
