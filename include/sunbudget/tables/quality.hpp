#pragma once

#include <cstdint>
#include <span>
#include <string>
#include <vector>

namespace sunbudget {

/// Values of the layer `quality`: a number 0 to 7 in the low three bits says where the albedo came
/// from, each higher bit one thing that was seen. Join them with `|`.
namespace quality {
inline constexpr std::uint16_t source_mask = 7;
inline constexpr std::uint16_t no_surface = 0;
inline constexpr std::uint16_t class_table = 1;
inline constexpr std::uint16_t default_class = 2;
inline constexpr std::uint16_t given_albedo = 3;
inline constexpr std::uint16_t reflectance = 4;
inline constexpr std::uint16_t filled = 5;

inline constexpr std::uint16_t cloud = 1u << 3;
inline constexpr std::uint16_t dilated_cloud = 1u << 4;
inline constexpr std::uint16_t cirrus = 1u << 5;
inline constexpr std::uint16_t cloud_shadow = 1u << 6;
inline constexpr std::uint16_t snow = 1u << 7;
inline constexpr std::uint16_t saturated = 1u << 8;
inline constexpr std::uint16_t high_aerosol = 1u << 9;
inline constexpr std::uint16_t out_of_range = 1u << 10;
inline constexpr std::uint16_t no_elevation = 1u << 11;
inline constexpr std::uint16_t outside_projection = 1u << 12;
inline constexpr std::uint16_t no_sky = 1u << 13;
inline constexpr std::uint16_t outside_scope = 1u << 14;
}  // namespace quality

/// One meaning: it holds where (pixel & mask) == value.
struct QualityRow {
    std::string name;
    std::uint16_t mask = 0;
    std::uint16_t value = 0;
    std::string text;
};

[[nodiscard]] std::span<const QualityRow> quality_rows();
/// The names of all that holds for a pixel, the source first.
[[nodiscard]] std::vector<std::string> quality_meanings(std::uint16_t pixel);

}  // namespace sunbudget
