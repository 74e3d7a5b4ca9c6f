#pragma once

#include <filesystem>

namespace sunbudget {

/// A folder for the coarse levels of the elevation where nothing is written, gone with the object.
struct ScratchFolder {
    std::filesystem::path path;
    /// Throws Error(output).
    ScratchFolder();
    ~ScratchFolder();
    ScratchFolder(const ScratchFolder&) = delete;
    ScratchFolder& operator=(const ScratchFolder&) = delete;
};

}  // namespace sunbudget
