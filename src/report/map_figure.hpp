#pragma once

#include <string>

#include "picture.hpp"
#include "sunbudget/model/run.hpp"

namespace sunbudget {

/// What all maps of a run have in common: the grid's shape on the ground.
struct MapFrame {
    int width = 0, height = 0;  ///< of the pictures
    double aspect = 1;          ///< width over height on the ground
    double width_m = 0;
    double north_deg = 0;  ///< of true north, clockwise from up, at the middle
    double dot_m = 0;      ///< width of a picture's dot
};
[[nodiscard]] MapFrame map_frame(const Run& run, int width, int height);

/// The box of a map; `inside` is what lies in it: pictures and outlines.
[[nodiscard]] std::string map_box(const MapFrame& frame, const std::string& id,
                                  const std::string& inside);
[[nodiscard]] std::string map_picture(const std::string& uri, const std::string& alt,
                                      const std::string& css_class = {});
/// ColourScale bar and north arrow.
[[nodiscard]] std::string map_furniture(const MapFrame& frame);
/// A bar of colours with marks and the unit.
[[nodiscard]] std::string legend(const ColourScale& scale, const std::string& unit);

}  // namespace sunbudget
