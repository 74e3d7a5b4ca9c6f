#include "sunbudget/base/version.hpp"

namespace sunbudget {

std::string_view program_version() noexcept {
    return SUNBUDGET_VERSION;
}

}  // namespace sunbudget
