#include "scratch_folder.hpp"

#include <cstdlib>
#include <string>
#include <system_error>

#include "sunbudget/base/error.hpp"

namespace sunbudget {

ScratchFolder::ScratchFolder() {
    std::string pattern = (std::filesystem::temp_directory_path() / "sunbudget-XXXXXX").string();
    if (mkdtemp(pattern.data()) == nullptr)
        throw Error(Cause::output, "cannot make a folder for scratch files", pattern,
                    "point TMPDIR to a place with room");
    path = pattern;
}

ScratchFolder::~ScratchFolder() {
    std::error_code ignored;
    std::filesystem::remove_all(path, ignored);
}

}  // namespace sunbudget
