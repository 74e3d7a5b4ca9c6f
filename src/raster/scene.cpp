#include "sunbudget/raster/scene.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <array>
#include <set>
#include <vector>

#include "product_facts.hpp"
#include "sunbudget/base/error.hpp"
#include "sunbudget/base/text.hpp"

namespace sunbudget {
namespace {

namespace fs = std::filesystem;

struct SceneFile {
    fs::path path;
    ProductFacts facts;
};

bool is_raster_name(const fs::path& path) {
    constexpr std::array endings{".tif", ".tiff", ".jp2", ".img"};
    const auto ending = lower_case(path.extension().string());
    return std::find(endings.begin(), endings.end(), ending) != endings.end();
}

std::vector<SceneFile> product_files(const fs::path& folder) {
    std::error_code error;
    std::vector<SceneFile> files;
    fs::directory_iterator entries(folder, error);
    if (error)
        throw Error(Cause::input, "no such folder, or it cannot be read", folder.string(),
                    "name the folder that holds the scene's files");
    for (const auto& entry : entries) {
        if (!is_raster_name(entry.path()) || !entry.is_regular_file(error)) continue;
        const auto facts = facts_of_name(entry.path().filename().string());
        if (facts && !facts->band.empty()) files.push_back({entry.path(), *facts});
    }
    std::sort(files.begin(), files.end(),
              [](const auto& a, const auto& b) { return a.path < b.path; });
    return files;
}

/// The products that have a band of surface reflectance.
std::set<std::string> reflectance_products(const std::vector<SceneFile>& files) {
    std::set<std::string> ids;
    for (const auto& file : files)
        if (file.facts.level == ProductLevel::surface_reflectance) ids.insert(file.facts.id);
    return ids;
}

std::string only_product(const fs::path& folder, const std::vector<SceneFile>& files) {
    if (files.empty())
        throw Error(Cause::input, "no files of a known product", folder.string(),
                    "name the bands one by one");
    const auto ids = reflectance_products(files);
    if (ids.empty())
        throw Error(Cause::input,
                    fmt::format("no surface reflectance; {} is {}", files.front().facts.id,
                                text_of(files.front().facts.level)),
                    folder.string(), "fetch the scene's Level-2 product");
    if (ids.size() > 1)
        throw Error(Cause::input,
                    "several scenes: " + joined(std::vector(ids.begin(), ids.end()), ", "),
                    folder.string(), "give each scene a folder of its own");
    return *ids.begin();
}

}  // namespace

Scene scene_in(const fs::path& folder) {
    const auto files = product_files(folder);
    Scene scene{folder, only_product(folder, files), {}};
    for (const auto& file : files) {
        if (file.facts.id != scene.id) continue;
        const auto [place, is_new] = scene.files.emplace(file.facts.band, file.path);
        if (!is_new)
            throw Error(
                Cause::input,
                fmt::format("two files of {}: {} and {}", file.facts.band,
                            place->second.filename().string(), file.path.filename().string()),
                folder.string(), "keep one of them, or name the bands one by one");
    }
    return scene;
}

std::map<std::string, fs::path> scene_files(const Scene& scene,
                                            std::span<const std::string> wanted) {
    std::map<std::string, fs::path> files;
    std::vector<std::string> missing;
    for (const auto& name : wanted) {
        const auto found = scene.files.find(name);
        if (found == scene.files.end())
            missing.push_back(name);
        else
            files.insert(*found);
    }
    if (!missing.empty())
        throw Error(Cause::input, fmt::format("{} has no {}", scene.id, joined(missing, ", ")),
                    scene.folder.string(), "fetch the missing files");
    return files;
}

}  // namespace sunbudget
