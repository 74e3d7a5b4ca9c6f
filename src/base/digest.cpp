#include "sunbudget/base/digest.hpp"

#include <fmt/format.h>
#include <openssl/evp.h>
#include <xxhash.h>

#include <array>
#include <cerrno>
#include <cstring>
#include <fstream>
#include <vector>

#include "sunbudget/base/error.hpp"

namespace sunbudget {

struct Sha256::State {
    EVP_MD_CTX* context = EVP_MD_CTX_new();
    ~State() { EVP_MD_CTX_free(context); }
};

Sha256::Sha256() : state_(std::make_unique<State>()) {
    if (state_->context == nullptr ||
        EVP_DigestInit_ex(state_->context, EVP_sha256(), nullptr) != 1)
        throw Error(Cause::internal, "SHA-256 cannot be set up");
}
Sha256::~Sha256() = default;
Sha256::Sha256(Sha256&&) noexcept = default;
Sha256& Sha256::operator=(Sha256&&) noexcept = default;

void Sha256::add(std::span<const std::byte> bytes) {
    EVP_DigestUpdate(state_->context, bytes.data(), bytes.size());
}
void Sha256::add(std::string_view text) {
    add(std::as_bytes(std::span(text.data(), text.size())));
}

std::string Sha256::hex() {
    std::array<unsigned char, 32> digest{};
    unsigned size = 0;
    EVP_DigestFinal_ex(state_->context, digest.data(), &size);
    std::string text;
    for (const auto byte : digest) text += fmt::format("{:02x}", byte);
    return text;
}

std::string sha256_of(std::string_view text) {
    Sha256 sha;
    sha.add(text);
    return sha.hex();
}

namespace {
std::ifstream opened(const std::filesystem::path& file) {
    std::ifstream stream(file, std::ios::binary);
    if (!stream)
        throw Error(Cause::input, std::string("cannot read: ") + std::strerror(errno),
                    file.string());
    return stream;
}

void add_piece(Sha256& sha, std::ifstream& stream, std::vector<char>& buffer) {
    stream.read(buffer.data(), static_cast<std::streamsize>(buffer.size()));
    sha.add(std::string_view(buffer.data(), static_cast<std::size_t>(stream.gcount())));
}

std::string whole_file(std::ifstream& stream, const std::filesystem::path& file) {
    Sha256 sha;
    std::vector<char> buffer(1 << 20);
    while (stream) add_piece(sha, stream, buffer);
    if (stream.bad()) throw Error(Cause::input, "read error", file.string());
    return sha.hex();
}
}  // namespace

std::string sha256_of_file(const std::filesystem::path& file) {
    auto stream = opened(file);
    return whole_file(stream, file);
}

std::string input_digest(const std::filesystem::path& file) {
    constexpr std::uintmax_t whole_up_to = 64'000'000;
    constexpr std::uintmax_t block = 65536, blocks = 64;
    auto stream = opened(file);
    const auto size = std::filesystem::file_size(file);
    if (size <= whole_up_to) return "sha256:" + whole_file(stream, file);
    Sha256 sha;
    sha.add(std::to_string(size));
    std::vector<char> buffer(block);
    for (std::uintmax_t i = 0; i < blocks; ++i) {
        stream.seekg(static_cast<std::streamoff>((size - block) * i / (blocks - 1)));
        add_piece(sha, stream, buffer);
        if (!stream) throw Error(Cause::input, "read error", file.string());
    }
    return "sampled-sha256:" + sha.hex();
}

std::uint64_t tile_checksum(std::span<const std::byte> bytes) noexcept {
    return XXH3_64bits(bytes.data(), bytes.size());
}

}  // namespace sunbudget
