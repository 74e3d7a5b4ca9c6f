#pragma once

#include <filesystem>
#include <map>
#include <span>
#include <string>

namespace sunbudget {

/// The files of one scene in a folder, by the product's own names (SR_B2, QA_PIXEL).
struct Scene {
    std::filesystem::path folder;
    std::string id;
    std::map<std::string, std::filesystem::path> files;
};

/// Lists a folder, not the folders below it, by file names alone. Of several products of a place the
/// only surface reflectance product is taken, so a Level-1 product may lie beside it.
///
/// errors  Error(input): no such folder, no product in it, Level-1 files only, several scenes, one
///         band twice
[[nodiscard]] Scene scene_in(const std::filesystem::path& folder);

/// The wanted files of a scene, by the product's names. Throws Error(input) naming all that are
/// missing.
[[nodiscard]] std::map<std::string, std::filesystem::path> scene_files(
    const Scene& scene, std::span<const std::string> wanted);

}  // namespace sunbudget
