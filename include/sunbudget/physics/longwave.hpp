#pragma once

#include <span>

namespace sunbudget {

/// Published formulas for the longwave of a clear sky from screen temperature and humidity. In the order
/// of their rows among the methods, family "longwave".
enum class LongwaveFormula {
    dilley_obrien1998,
    prata1996,
    brutsaert1975,
    brunt1932,
    swinbank1963,
    idso_jackson1969,
    idso1981,
    angstrom1918,
    satterlund1979,
    konzelmann1994,
    maykut_church1973,
};

/// What a clear sky sends down to level open ground.
///
/// in      temperature_k        of the air at screen height
///         vapour_pressure_hpa  at screen height, >= 0
/// out     W m-2
/// errors  none; NaN in gives NaN out (a formula that does not use the vapour gives a value without it)
/// source  Brunt, Q. J. R. Meteorol. Soc. 58, 1932; Swinbank, ibid. 89, 1963; Idso & Jackson, J. Geophys.
///         Res. 74, 1969; Brutsaert, Water Resour. Res. 11, 1975; Idso, ibid. 17, 1981; Prata, Q. J. R.
///         Meteorol. Soc. 122, 1996; Dilley & O'Brien, ibid. 124, 1998; Angstrom 1918; Satterlund, Water
///         Resour. Res. 15, 1979; Konzelmann et al., Global Planet. Change 9, 1994; Maykut & Church, J.
///         Appl. Meteorol. 12, 1973
/// accuracy among themselves 0.77 to 0.85 of a black body at 20 deg C and 15 hPa: that is their uncertainty
[[nodiscard]] double clear_longwave_w_m2(LongwaveFormula formula, double temperature_k,
                                         double vapour_pressure_hpa) noexcept;

/// The same for a row of pixels.
///
/// shape   three rows of the same length; flux may be one of the inputs
/// units   K, hPa, W m-2
/// nodata  NaN in either input gives NaN out
/// errors  none; float: within 0.002 W m-2 of the above from 200 to 330 K
void clear_longwave(LongwaveFormula formula, std::span<const float> temperature_k,
                    std::span<const float> vapour_pressure_hpa,
                    std::span<float> flux_w_m2) noexcept;

/// Laws for what a cloud adds. In the order of their rows among the methods, family "longwave_cloud".
enum class LongwaveCloud {
    unsworth_monteith1975,
    crawford_duchon1999,
    sugita_brutsaert1993,
    maykut_church1973,
    jacobs1978
};

/// All of those laws are straight lines: emissivity of the sky = factor * that of the clear sky + added.
struct CloudTerms {
    double factor = 1;
    double added = 0;
};

/// in      cloud  share of the sky, 0..1; for crawford_duchon1999 the cloud number 1 - G/Gclear
/// source  Unsworth & Monteith, Q. J. R. Meteorol. Soc. 101, 1975; Crawford & Duchon, J. Appl. Meteorol. 38,
///         1999; Sugita & Brutsaert, Water Resour. Res. 29, 1993; Maykut & Church 1973; Jacobs 1978
[[nodiscard]] CloudTerms cloud_terms(LongwaveCloud law, double cloud) noexcept;

/// Cloud number of Crawford & Duchon: what the clouds take of the clear sky's sunlight, within 0..1.
///
/// in      clear_w_m2 > 0
[[nodiscard]] double cloud_number(double global_w_m2, double clear_w_m2) noexcept;

/// A clear sky's longwave with clouds added, no more than a black body's at the air's temperature (two of
/// the laws go beyond it in warm moist air).
[[nodiscard]] double cloudy_longwave_w_m2(double clear_w_m2, double temperature_k,
                                          const CloudTerms& terms) noexcept;
/// shape   two rows of the same length; flux is changed in place
/// nodata  NaN in either gives NaN out
void cloudy_longwave(std::span<const float> temperature_k, const CloudTerms& terms,
                     std::span<float> flux_w_m2) noexcept;

/// The same with a share of the sky for each pixel.
///
/// shape   three rows of the same length; flux is changed in place
/// nodata  NaN in any of them, or a share outside 0..1, gives NaN out
void cloudy_longwave(LongwaveCloud law, std::span<const float> temperature_k,
                     std::span<const float> cloud, std::span<float> flux_w_m2) noexcept;

/// sigma T^4.
[[nodiscard]] double black_body_w_m2(double temperature_k) noexcept;
/// shape   two rows of the same length, which may be one
/// nodata  NaN through
void black_body(std::span<const float> temperature_k, std::span<float> flux_w_m2) noexcept;

}  // namespace sunbudget
