// Prints the sun's elevation without refraction for the worked example of Reda & Andreas (2004).

#include <cstdio>
#include <sunbudget/base/time.hpp>
#include <sunbudget/base/units.hpp>
#include <sunbudget/physics/sun.hpp>
#include <sunbudget/physics/sun_place.hpp>

int main() {
    using namespace sunbudget;
    const UtcSeconds instant = 1066419030;  // 2003-10-17T19:30:30Z
    const Horizontal sun =
        horizontal(sun_state(instant), rad_from_deg(39.742476), rad_from_deg(-105.1786), 1830.14);
    std::printf("%.2f\n", deg_from_rad(sun.elevation_rad));
}
