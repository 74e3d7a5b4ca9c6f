"""A year of hourly weather at an invented station: simple geometry, a clear-sky curve, random cloud."""

import numpy as np

LATITUDE_DEG, LONGITUDE_DEG, YEAR, STEPS = 47.9, 14.3, 2025, 6  # steps of ten minutes within the hour
HEADER = "stamp,sun_total,sun_beam,sun_sky,air,hum,press,wind,okta,ground"


def sin_elevation(hours):
    """Sine of the sun's elevation for hours of the year in UTC (Cooper 1969 declination, Spencer's equation of time)."""
    day = 1 + np.floor(hours / 24)
    declination = np.radians(23.45) * np.sin(2 * np.pi * (284 + day) / 365)
    b = 2 * np.pi * (day - 1) / 365
    minutes = 229.18 * (0.000075 + 0.001868 * np.cos(b) - 0.032077 * np.sin(b) - 0.014615 * np.cos(2 * b) - 0.040849 * np.sin(2 * b))
    solar = hours % 24 + LONGITUDE_DEG / 15 + minutes / 60
    hour_angle = np.radians(15 * (solar - 12))
    latitude = np.radians(LATITUDE_DEG)
    return np.sin(latitude) * np.sin(declination) + np.cos(latitude) * np.cos(declination) * np.cos(hour_angle)


def wander(rng, count, memory, spread):
    """A random walk pulled back to 0: each value keeps the share `memory` of the one before."""
    kicks = rng.standard_normal(count) * np.sqrt(1 - memory**2)
    values = np.empty(count)
    values[0] = rng.standard_normal()
    for i in range(1, count):
        values[i] = memory * values[i - 1] + kicks[i]
    return spread * values


def hourly_sun(cloud):
    """Mean global, beam-normal and sky light of each hour: Haurwitz (1945) clear global, Kasten & Czeplak (1980) cloud."""
    hours = np.arange(8760)[:, None] + (np.arange(STEPS)[None, :] + 0.5) / STEPS
    up = np.clip(sin_elevation(hours), 0, None)
    lit = np.maximum(up, 1e-3)
    clear = np.where(up > 0, 1098 * lit * np.exp(-0.057 / lit), 0.0)
    total = clear * (1 - 0.75 * cloud[:, None] ** 3.4)
    clear_share = np.clip(0.11 + 0.05 / np.maximum(up, 0.08), 0, 1)  # brighter sky under a low sun
    share = clear_share + (1 - clear_share) * np.clip(cloud[:, None] * 1.15, 0, 1) ** 2
    sky = total * np.clip(share, 0, 1)
    beam = np.where(up > 0.01, (total - sky) / lit, 0.0)
    sky = total - beam * up
    return total.mean(1), beam.mean(1), sky.mean(1)


def make_year(rng):
    count = 8760
    hour = np.arange(count)
    day = hour / 24
    spells = wander(rng, count, 0.985, 1.3) + wander(rng, count, 0.8, 0.35) - 0.25 * np.cos(2 * np.pi * (day - 200) / 365)
    okta = np.clip(np.round(8 / (1 + np.exp(-1.9 * spells))), 0, 8)
    total, beam, sky = hourly_sun(okta / 8)
    season = 9.6 - 10.4 * np.cos(2 * np.pi * (day - 17) / 365)
    warmth = np.zeros(count)
    for i in range(1, count):  # the air follows the sun with a delay of some hours
        warmth[i] = 0.83 * warmth[i - 1] + 0.17 * total[i]
    air = season + 0.023 * warmth - 2.6 + wander(rng, count, 0.992, 3.4) - (1 - okta / 8) * 1.5 * (total == 0)
    dew = season - 4.0 + wander(rng, count, 0.99, 2.6) + 0.28 * (air - season)
    humidity = np.clip(100 * vapour(dew) / vapour(air), 18, 100)
    pressure = 986 + wander(rng, count, 0.998, 7.5)
    wind = np.clip(2.4 + wander(rng, count, 0.93, 1.5) + 0.0016 * total, 0.1, None)
    clear_night = (1 - okta / 8) * (total == 0)
    ground = air + 0.021 * total / (1 + 0.12 * wind) - 2.4 * clear_night
    return np.stack([total, beam, sky, air, humidity, pressure, wind, okta, ground], 1)


def vapour(celsius):
    """Saturation vapour pressure (FAO-56, eq. 11), kPa."""
    return 0.6108 * np.exp(17.27 * celsius / (celsius + 237.3))


def write_station(path, rng):
    digits = (1, 1, 1, 1, 0, 1, 1, 0, 1)
    start = np.datetime64(f"{YEAR}-01-01T00:00")
    with open(path, "w", encoding="ascii", newline="\n") as out:
        out.write(HEADER + "\n")
        for i, row in enumerate(make_year(rng)):
            stamp = str(start + np.timedelta64(i, "h"))
            out.write(stamp + "Z," + ",".join(f"{v:.{n}f}" for v, n in zip(row + 0.0, digits)) + "\n")
