#pragma once

#include <filesystem>
#include <optional>

namespace sunbudget::test {

/// The demo town's folder, made once in the build folder: not to be written to. Nothing where the
/// Python packages of its generator are missing.
[[nodiscard]] std::optional<std::filesystem::path> demo_town();

}  // namespace sunbudget::test
