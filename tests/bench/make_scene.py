#!/usr/bin/env python3
"""Makes the benchmark's invented scene: make_scene.py FOLDER [SIDE].

    B2.tif B4.tif B5.tif B6.tif B7.tif   surface reflectance, UInt16, scaled as Landsat Collection 2 Level-2
    cover.tif                            land cover, Byte, ESA WorldCover codes in parcels
    elevation.tif                        Float32 metres, fractal hills

A fixed seed: two runs give the same pixels.
"""
import os
import sys

import numpy as np
from osgeo import gdal, osr

gdal.UseExceptions()
SCALE, OFFSET = 2.75e-5, -0.2  # Landsat Collection 2 Level-2
PIXEL_M = 10
PARCEL_PX, SPECK_PX = 40, 5  # fields and woods; single trees, houses, ponds
SPECKS = 0.06  # share of the land
BANDS = ["B2", "B4", "B5", "B6", "B7"]
# code: share of the land, reflectance in the five bands (invented, of the usual shape of such spectra)
CLASSES = {
    10: (0.30, [0.030, 0.035, 0.300, 0.150, 0.070]),  # trees
    20: (0.08, [0.050, 0.070, 0.260, 0.210, 0.120]),  # shrubs
    30: (0.18, [0.045, 0.060, 0.330, 0.220, 0.120]),  # grass
    40: (0.24, [0.060, 0.085, 0.290, 0.250, 0.160]),  # crops
    50: (0.10, [0.100, 0.130, 0.210, 0.230, 0.190]),  # built
    60: (0.04, [0.120, 0.190, 0.290, 0.360, 0.310]),  # bare
    80: (0.06, [0.035, 0.025, 0.015, 0.008, 0.006]),  # water
}


def smooth(rng, side, cell):
    """Bilinear noise of one cell size, about -1 to 1."""
    count = side // cell + 2
    nodes = rng.uniform(-1, 1, (count, count)).astype(np.float32)
    place = np.arange(side, dtype=np.float32) / cell
    first = place.astype(int)
    share = place - first
    across = nodes[:, first] * (1 - share) + nodes[:, first + 1] * share
    return across[first] * (1 - share)[:, None] + across[first + 1] * share[:, None]


def fractal(rng, side):
    """Height with a power spectrum that falls as on worn hills, mean 0, deviation 1."""
    noise = np.fft.rfft2(rng.standard_normal((side, side), dtype=np.float32))
    across = np.fft.rfftfreq(side).astype(np.float32)
    down = np.fft.fftfreq(side).astype(np.float32)
    square = across[None, :] ** 2 + down[:, None] ** 2
    square[0, 0] = 1
    noise *= square ** -1.05
    noise[0, 0] = 0
    height = np.fft.irfft2(noise, (side, side)).astype(np.float32)
    return height / height.std()


def parcels(rng, side, cell):
    """For each pixel the number of the nearest of seeds that stand one in each square of a grid;
    the borders are ragged."""
    count = side // cell + 3
    seed_column = rng.uniform(0, cell, (count, count)).astype(np.float32)
    seed_row = rng.uniform(0, cell, (count, count)).astype(np.float32)
    ragged = 0.1 * cell * smooth(rng, side, 5) + 1.0 * smooth(rng, side, 2)
    column = np.arange(side)
    numbers = np.empty((side, side), np.int32)
    for top in range(0, side, 256):
        row = np.arange(top, min(top + 256, side))
        best = np.full((len(row), side), np.inf, np.float32)
        for down in (0, 1, 2):
            for across in (0, 1, 2):
                r = (row // cell + down)[:, None]
                c = (column // cell + across)[None, :]
                away = ((c - 1) * cell + seed_column[r, c] - column[None, :] - ragged[row]) ** 2
                away += ((r - 1) * cell + seed_row[r, c] - row[:, None] - ragged.T[row]) ** 2
                nearer = away < best
                best = np.where(nearer, away, best)
                numbers[top:top + len(row)] = np.where(nearer, r * count + c, numbers[top:top + len(row)])
    return numbers, count


def classes_of(rng, count):
    """A class for each parcel: like stands by like, in the shares wanted."""
    wish = sum(smooth(rng, count, cell) for cell in (32, 12, 4) if cell < count)
    wish += 0.6 * rng.uniform(-1, 1, wish.shape)
    order = np.argsort(np.argsort(wish, axis=None)).reshape(wish.shape) / wish.size
    ends = np.cumsum([share for share, _ in CLASSES.values()])
    return np.minimum(np.searchsorted(ends, order), len(CLASSES) - 1)


def write(folder, name, pixels, kind, predictor, nodata):
    side = pixels.shape[0]
    options = ["TILED=YES", "BLOCKXSIZE=512", "BLOCKYSIZE=512", "COMPRESS=DEFLATE", f"PREDICTOR={predictor}",
               "NUM_THREADS=ALL_CPUS"]
    made = gdal.GetDriverByName("GTiff").Create(f"{folder}/{name}.tif", side, side, 1, kind, options)
    place = osr.SpatialReference()
    place.ImportFromEPSG(32633)
    made.SetProjection(place.ExportToWkt())
    made.SetGeoTransform([460000, PIXEL_M, 0, 5360000, 0, -PIXEL_M])
    if nodata is not None:
        made.GetRasterBand(1).SetNoDataValue(nodata)
    made.GetRasterBand(1).WriteArray(pixels)
    del made  # GDAL writes what is left when the last reference goes


def make(folder, side):
    rng = np.random.default_rng(20250621)
    os.makedirs(folder, exist_ok=True)
    height = fractal(rng, side)
    write(folder, "elevation", 900 + 350 * height, gdal.GDT_Float32, 3, -9999)
    numbers, count = parcels(rng, side, PARCEL_PX)
    kind = classes_of(rng, count).astype(np.uint8).ravel()[numbers]
    specks, speck_count = parcels(rng, side, SPECK_PX)
    speck_kind = np.where(rng.uniform(size=speck_count**2) < SPECKS, rng.integers(0, len(CLASSES), speck_count**2), 255)
    speck_kind = speck_kind.astype(np.uint8)[specks]
    kind = np.where(speck_kind < 255, speck_kind, kind)
    del specks, speck_kind
    codes = np.array(list(CLASSES), np.uint8)
    write(folder, "cover", codes[kind], gdal.GDT_Byte, 1, 0)
    brightness = rng.normal(1, 0.12, count * count).astype(np.float32)[numbers]
    brightness *= 1 + 0.1 * smooth(rng, side, 512) + 0.05 * smooth(rng, side, 64) + 0.04 * smooth(rng, side, 6)
    for number, band in enumerate(BANDS):
        typical = np.array([spectrum[number] for _, spectrum in CLASSES.values()], np.float32)
        reflectance = typical[kind] * brightness
        reflectance += 0.003 * smooth(rng, side, 200)
        reflectance += rng.standard_normal((side, side), dtype=np.float32) * (0.002 + 0.02 * reflectance)
        stored = np.clip(np.rint((reflectance - OFFSET) / SCALE), 1, 65535).astype(np.uint16)
        write(folder, band, stored, gdal.GDT_UInt16, 2, 0)
    with open(f"{folder}/complete", "w", encoding="utf-8") as mark:
        mark.write(f"{side}\n")


if __name__ == "__main__":
    make(sys.argv[1], int(sys.argv[2]) if len(sys.argv) > 2 else 8192)
