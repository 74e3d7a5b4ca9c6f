#pragma once

#include <string>
#include <vector>

#include "sunbudget/base/error.hpp"
#include "sunbudget/plan/place.hpp"

namespace sunbudget {

/// Collects what is wrong with a plan, so that all of it can be said at once.
class Mistakes {
  public:
    void add(const Place& place, std::string what, std::string todo = {});
    [[nodiscard]] std::size_t count() const { return found_.size(); }
    /// Throws Error(usage) with every problem, in the order of the file's lines, when there is one.
    void throw_if_any();

  private:
    struct Found {
        int line;
        Problem problem;
    };
    std::vector<Found> found_;
};

}  // namespace sunbudget
