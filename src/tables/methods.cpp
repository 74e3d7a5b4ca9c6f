#include "sunbudget/tables/methods.hpp"

#include <algorithm>

#include "sunbudget/base/error.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/tables/sensors.hpp"

namespace sunbudget {

namespace {

std::vector<Method> written_rows() {
    return {
        {.family = "sun_position",
         .name = "erfa",
         .text = "apparent place of the sun, topocentric, from the standard astronomy routines",
         .source = "ERFA, the IAU SOFA routines: precession-nutation IAU 2006/2000A, Earth vector, "
                   "light time, aberration; parallax 8.794 arc seconds over the distance in au",
         .parameters = {}},
        {.family = "air_mass",
         .name = "kasten-young1989",
         .text = "relative optical air mass, scaled by pressure",
         .source = "Kasten & Young, Applied Optics 28, 1989, 4735-4738",
         .parameters = {}},
        {.family = "clear_sky",
         .name = "esra2000",
         .text = "beam and sky light of a cloudless day from one number for the air's turbidity; "
                 "solar constant 1361 W/m2",
         .source = "Rigollier, Bauer & Wald, Solar Energy 68, 2000, 33-48; Rayleigh optical depth "
                   "of Kasten, Solar Energy 56, 1996, 239-244",
         .parameters = {{.name = "turbidity",
                         .unit = "1",
                         .default_value = 3.0,
                         .usual = {2.0, 7.0},
                         .allowed = {0.0, 9.0, true},
                         .text = "Linke turbidity for air mass 2; the published fit fails above "
                                 "9"}}},
        {.family = "clear_sky",
         .name = "bird-hulstrom1981",
         .text = "layers of the air one by one, and the light that goes to and fro between ground "
                 "and sky; solar constant 1361 W/m2",
         .source = "Bird & Hulstrom, SERI/TR-642-761, 1981; K1 0.1, forward scattering 0.84",
         .parameters = {{.name = "ozone",
                         .unit = "atm-cm",
                         .default_value = 0.3,
                         .usual = {0.2, 0.5},
                         .allowed = {0.0, 1.0},
                         .text = "ozone in the air column"},
                        {.name = "water",
                         .unit = "cm",
                         .default_value = 1.5,
                         .usual = {0.1, 6.0},
                         .allowed = {0.0, 10.0},
                         .text = "water vapour in the air column, precipitable"},
                        {.name = "aerosol380",
                         .unit = "1",
                         .default_value = 0.15,
                         .usual = {0.02, 0.6},
                         .allowed = {0.0, 2.0},
                         .text = "optical depth of haze at 380 nm"},
                        {.name = "aerosol500",
                         .unit = "1",
                         .default_value = 0.1,
                         .usual = {0.02, 0.5},
                         .allowed = {0.0, 2.0},
                         .text = "optical depth of haze at 500 nm"},
                        {.name = "ground_albedo",
                         .unit = "1",
                         .default_value = {},
                         .usual = {0.02, 0.9},
                         .allowed = {0.0, 1.0},
                         .text =
                             "of the ground that throws light back to the sky; where none is given "
                             "the mean of the run's albedo around each pixel"}}},
        {.family = "clear_sky",
         .name = "ineichen-perez2002",
         .text = "global and beam from turbidity and height; solar constant 1361 W/m2",
         .source = "Ineichen & Perez, Solar Energy 73, 2002, 151-157, with the paper's factor "
                   "exp(0.01 AM^1.8), held where it "
                   "would make the air clearer as the sun sinks (below about 5 degrees)",
         .parameters = {{.name = "turbidity",
                         .unit = "1",
                         .default_value = 3.0,
                         .usual = {2.0, 7.0},
                         .allowed = {1.0, 9.0},
                         .text = "Linke turbidity for air mass 2"}}},
        {.family = "clear_sky",
         .name = "asce2005",
         .text = "beam and diffuse indices from pressure and vapour pressure; solar constant "
                 "0.0820 MJ m-2 min-1",
         .source = "ASCE-EWRI, The ASCE Standardized Reference Evapotranspiration Equation, 2005, "
                   "app. D, applied to each moment",
         .parameters = {{.name = "vapour_pressure",
                         .unit = "hPa",
                         .default_value = 12.0,
                         .usual = {1.0, 35.0},
                         .allowed = {0.0, 60.0},
                         .text = "of the air near the ground"},
                        {.name = "turbidity_coefficient",
                         .unit = "1",
                         .default_value = 1.0,
                         .usual = {0.5, 1.0},
                         .allowed = {0.0, 1.0, true},
                         .text = "1 for clean air, 0.5 for very turbid air"}}},
        {.family = "clear_sky",
         .name = "fao56",
         .text = "global = (0.75 + 2e-5 height) times the light outside the air, for those who "
                 "report by it; solar constant 0.0820 "
                 "MJ m-2 min-1, the sun's true place. It says nothing of beam and sky light: they "
                 "share the global as esra2000's "
                 "do at turbidity 3",
         .source = "Allen, Pereira, Raes & Smith, FAO Irrigation and Drainage Paper 56, 1998, eq. "
                   "37; shares of beam and diffuse: "
                   "Rigollier, Bauer & Wald, Solar Energy 68, 2000, 33-48",
         .parameters = {}},
        {.family = "diffuse_sky",
         .name = "hay-davies1980",
         .text = "part of the sky's light comes from around the sun and is shaded with it, the "
                 "rest is even",
         .source = "Hay & Davies, Proc. First Canadian Solar Radiation Data Workshop, 1980, 59-72",
         .parameters = {}},
        {.family = "diffuse_sky",
         .name = "liu-jordan1963",
         .text = "the sky's light is even over the whole sky",
         .source = "Liu & Jordan, Solar Energy 7, 1963, 53-74",
         .parameters = {}},
        {.family = "diffuse_sky",
         .name = "perez1990",
         .text = "light around the sun and a brighter or darker rim, by clearness and brightness "
                 "of the sky",
         .source = "Perez, Ineichen, Seals, Michalsky & Stewart, Solar Energy 44, 1990, 271-289",
         .parameters = {}},
        {.family = "real_sky",
         .name = "measured",
         .text = "beam and sky light of a weather table as shares of the clear sky's at the "
                 "station, taken to every pixel's own height, "
                 "horizon and slope; sky light that was not measured is split off the global",
         .source = "hourly and daily split: Erbs, Klein & Duffie, Solar Energy 28, 1982, 293-302; "
                   "from 0.90 to 1.00 of the clear sky's light "
                   "passing over to its own share (our combination)",
         .parameters = {}},
        {.family = "real_sky",
         .name = "kasten-czeplak1980",
         .text = "light of an hour from the cloud cover: 1 - 0.75 N^3.4 of the clear sky's, sky "
                 "light's share from the clear sky's own to all of it",
         .source = "Kasten & Czeplak, Solar Energy 24, 1980, 177-189",
         .parameters = {}},
        {.family = "real_sky",
         .name = "mean-cloud",
         .text = "a period's mean cloud as a mixture of clear and overcast skies: 1 - 0.75 N of "
                 "the clear sky's light, or as the plan says",
         .source = "linear mixture; light under overcast of Kasten & Czeplak, Solar Energy 24, "
                   "1980, 177-189",
         .parameters = {}},
        {.family = "real_sky",
         .name = "clear-sky-index",
         .text = "global over the clear sky's, pixel by pixel, parted into beam and sky light as "
                 "mean cloud of the same global is",
         .source = "given by the user",
         .parameters = {}},
        {.family = "real_sky",
         .name = "angstrom-prescott",
         .text = "a month's light from its hours of sunshine: (0.25 + 0.50 n/N) of the light "
                 "outside the air, or the plan's coefficients",
         .source = "Allen, Pereira, Raes & Smith, FAO Irrigation and Drainage Paper 56, 1998, eq. "
                   "35; sky light's share: Erbs, Klein & "
                   "Duffie, Solar Energy 28, 1982, 293-302, monthly",
         .parameters = {}},
        {.family = "horizon",
         .name = "terrain-horizons",
         .text = "horizons in evenly spaced directions, full resolution near the pixel and coarser "
                 "levels beyond",
         .source = "sky view: Dozier & Frew, IEEE Trans. Geosci. Remote Sens. 28, 1990, 963-969; "
                   "slopes: Horn, Proc. IEEE 69, "
                   "1981, 14-47; refraction 0.13, common practice in surveying",
         .parameters = {}},
        {.family = "albedo",
         .name = "class-table",
         .text = "the typical albedo of the pixel's land-cover class",
         .source = "the class table's own sources, row by row",
         .parameters = {}},
        {.family = "albedo",
         .name = "given",
         .text = "the albedo of a raster or one number for the whole grid",
         .source = "given by the user",
         .parameters = {{.name = "value",
                         .unit = "1",
                         .default_value = {},
                         .usual = {0.02, 0.95},
                         .allowed = {0.0, 1.0},
                         .text = "broadband albedo; outside the usual range no natural or built "
                                 "surface is found (Oke 1987, Tables 1.1 and 8.2)"}}},
        {.family = "albedo",
         .name = "own-weights",
         .text = "a sum of the image's reflectance with the plan's own weights; their error is not "
                 "known, 0.03 is taken",
         .source = "given by the user",
         .parameters = {}},
    };
}

Method heat_row(std::string family, std::string name, std::string text, std::string source) {
    return {.family = std::move(family),
            .name = std::move(name),
            .text = std::move(text),
            .source = std::move(source),
            .parameters = {}};
}

/// Longwave, emissivity and surface temperature. In the order of physics/longwave.hpp.
std::vector<Method> heat_rows() {
    const std::string sky = "longwave", cloud = "longwave_cloud", surface = "surface_temperature",
                      emissivity = "emissivity";
    const std::string review = "; form as in later users of the paper";
    return {
        heat_row(sky, "dilley-obrien1998",
                 "clear sky from temperature and precipitable water: a flux fitted to radiative "
                 "transfer",
                 "Dilley & O'Brien, Q. J. R. Meteorol. Soc. 124, 1998, 1391-1401" + review),
        heat_row(sky, "prata1996", "clear sky by an emissivity from precipitable water",
                 "Prata, Q. J. R. Meteorol. Soc. 122, 1996, 1127-1151" + review),
        heat_row(sky, "brutsaert1975",
                 "clear sky by an emissivity worked out for a standard atmosphere",
                 "Brutsaert, Water Resour. Res. 11, 1975, 742-744" + review),
        heat_row(sky, "brunt1932",
                 "clear sky by an emissivity from the root of the vapour pressure, constants 0.52 "
                 "and 0.065",
                 "Brunt, Q. J. R. Meteorol. Soc. 58, 1932, 389-420" + review),
        heat_row(sky, "swinbank1963", "clear sky by an emissivity from the temperature alone",
                 "Swinbank, Q. J. R. Meteorol. Soc. 89, 1963, 339-348 (from memory)"),
        heat_row(sky, "idso-jackson1969", "clear sky by an emissivity from the temperature alone",
                 "Idso & Jackson, J. Geophys. Res. 74, 1969, 5397-5403" + review),
        heat_row(sky, "idso1981", "clear sky by an emissivity from temperature and vapour pressure",
                 "Idso, Water Resour. Res. 17, 1981, 295-304" + review),
        heat_row(sky, "angstrom1918", "clear sky by an emissivity from the vapour pressure",
                 "Angstrom, Smithsonian Misc. Coll. 65, 1918" + review),
        heat_row(sky, "satterlund1979", "clear sky by an emissivity that holds in the cold too",
                 "Satterlund, Water Resour. Res. 15, 1979, 1649-1650" + review),
        heat_row(sky, "konzelmann1994", "clear sky by an emissivity found over the Greenland ice",
                 "Konzelmann et al., Global Planet. Change 9, 1994, 143-164" + review),
        heat_row(sky, "maykut-church1973", "clear sky by one emissivity found in the Arctic",
                 "Maykut & Church, J. Appl. Meteorol. 12, 1973, 620-628" + review),
        heat_row("longwave_daily", "fao56",
                 "net of whole days from the highest and lowest temperature, vapour pressure and "
                 "Rs/Rso; eq. 39, its own sigma and 273.16",
                 "Allen, Pereira, Raes & Smith 1998, FAO Irrigation and Drainage Paper 56"),
        heat_row("longwave_daily", "asce2005",
                 "the same with its own sigma, Rs/Rso held within 0.3 and 1",
                 "ASCE-EWRI 2005, The ASCE Standardized Reference Evapotranspiration Equation "
                 "(constants and limits from memory)"),
        heat_row(cloud, "unsworth-monteith1975",
                 "a cloud share c makes the emissivity (1 - 0.84 c) e + 0.84 c",
                 "Unsworth & Monteith, Q. J. R. Meteorol. Soc. 101, 1975, 13-24"),
        heat_row(cloud, "crawford-duchon1999",
                 "a cloud number c, from sunlight over the clear sky's, makes the emissivity (1 - "
                 "c) e + c",
                 "Crawford & Duchon, J. Appl. Meteorol. 38, 1999, 474-480"),
        heat_row(cloud, "sugita-brutsaert1993",
                 "a cloud share c makes the emissivity e (1 + 0.0496 c^2.45)",
                 "Sugita & Brutsaert, Water Resour. Res. 29, 1993 (from memory)"),
        heat_row(cloud, "maykut-church1973",
                 "a cloud share c makes the emissivity e (1 + 0.22 c^2.75)",
                 "Maykut & Church 1973 (from memory)"),
        heat_row(cloud, "jacobs1978",
                 "a cloud share c makes the emissivity e (1 + 0.26 c), 1 at most",
                 "Jacobs 1978 (from memory)"),
        heat_row(surface, "given", "a number, a raster or a weather table's column",
                 "given by the user"),
        heat_row(surface, "air-offset", "the air's temperature and a fixed difference",
                 "given by the user"),
        heat_row(
            surface, "balance",
            "steady balance of light, heat radiation and air over dry built and bare surfaces; no "
            "stored heat, no moisture",
            "ASTM E1980-11: heat exchange of 5, 12 and 30 W m-2 K-1 in low, medium and high wind"),
        heat_row(emissivity, "class-table", "the emissivity of the pixel's land-cover class",
                 "the class table's own sources, row by row"),
        heat_row(emissivity, "given", "a raster or one number", "given by the user"),
        heat_row(
            emissivity, "sobrino2004",
            "from red and near-infrared reflectance by thresholds of the NDVI; built kinds keep "
            "their class's, snow has 0.985",
            "Sobrino, Jimenez-Munoz & Paolini, Remote Sens. Environ. 90, 2004, 434-440 (from "
            "memory; its soil term is a thermal band's); snow: Dozier & Warren 1982 (from memory)"),
        heat_row("sri", "astm-e1980",
                 "solar reflectance index at 1000 W/m2, air at 310 K, a sky of 300 K, solved for "
                 "every pixel",
                 "ASTM E1980-11"),
    };
}

/// The first row of a family is its default.
const std::vector<Method>& table() {
    static const std::vector<Method> rows = [] {
        auto all = written_rows();
        for (auto& row : heat_rows()) all.push_back(std::move(row));
        for (const auto& set : weight_sets())
            all.push_back({.family = "albedo",
                           .name = set.name,
                           .text = "a weighted sum of the image's reflectance; " + set.text,
                           .source = set.source,
                           .parameters = {}});
        return all;
    }();
    return rows;
}

}  // namespace

std::string Range::text() const {
    if (low_open) return "above " + shortest(low) + " and up to " + shortest(high);
    return shortest(low) + " to " + shortest(high);
}

Verdict judge(const Parameter& parameter, double value) noexcept {
    if (!parameter.allowed.holds(value)) return Verdict::refused;
    return parameter.usual.holds(value) ? Verdict::fine : Verdict::unusual;
}

const Parameter* Method::parameter(std::string_view wanted) const noexcept {
    for (const auto& candidate : parameters)
        if (candidate.name == wanted) return &candidate;
    return nullptr;
}

std::span<const Method> methods() {
    return table();
}

std::vector<std::string> method_families() {
    std::vector<std::string> families;
    for (const auto& row : table())
        if (std::find(families.begin(), families.end(), row.family) == families.end())
            families.push_back(row.family);
    return families;
}

std::vector<std::string> method_names(std::string_view family) {
    std::vector<std::string> names;
    for (const auto& row : table())
        if (row.family == family) names.push_back(row.name);
    return names;
}

std::vector<std::string> methods_with(std::string_view family, std::string_view parameter) {
    std::vector<std::string> names;
    for (const auto& row : table())
        if (row.family == family && row.parameter(parameter) != nullptr) names.push_back(row.name);
    return names;
}

const Method& method(std::string_view family, std::string_view name) {
    for (const auto& row : table())
        if (row.family == family && row.name == name) return row;
    throw Error(Cause::usage, "no method \"" + std::string(name) + "\" for " + std::string(family),
                {}, suggestion(name, method_names(family)));
}

}  // namespace sunbudget
