"""Writing what was made: rasters on one grid, polygons, the class table, a note."""

import csv

import numpy as np
from osgeo import gdal, ogr, osr

from .classes import CLASSES

EPSG = 32633
WEST_M, SOUTH_M = 448000.0, 5303000.0  # an arbitrary corner: no real place is meant


def reference():
    crs = osr.SpatialReference()
    crs.ImportFromEPSG(EPSG)
    crs.SetAxisMappingStrategy(osr.OAMS_TRADITIONAL_GIS_ORDER)
    return crs


def write_raster(path, values, cell, nodata, colours=None, unit=None):
    kind = gdal.GDT_Byte if values.dtype == np.uint8 else gdal.GDT_Float32
    options = ["TILED=YES", "COMPRESS=DEFLATE", f"PREDICTOR={1 if kind == gdal.GDT_Byte else 3}"]
    rows, columns = values.shape
    out = gdal.GetDriverByName("GTiff").Create(str(path), columns, rows, 1, kind, options)
    out.SetProjection(reference().ExportToWkt())
    out.SetGeoTransform([WEST_M, cell, 0, SOUTH_M + rows * cell, 0, -cell])
    band = out.GetRasterBand(1)
    band.SetNoDataValue(nodata)
    if unit:
        band.SetUnitType(unit)
    if colours:
        table = gdal.ColorTable()
        for code, colour in colours.items():
            table.SetColorEntry(code, colour + (255,))
        band.SetColorTable(table)
    band.WriteArray(values)


def heights(values):
    """Kept to 1/64 m: far finer than any survey, and it packs well."""
    return (np.round(values * 64) / 64).astype(np.float32)


def worldcover(detail):
    to = np.zeros(256, np.uint8)
    for c in CLASSES:
        to[c.code] = c.worldcover
    return to[detail]


def write_polygons(path, layer_name, items, fields):
    source = ogr.GetDriverByName("GPKG").CreateDataSource(str(path))
    layer = source.CreateLayer(layer_name, reference(), ogr.wkbPolygon)
    for name, kind in fields.items():
        layer.CreateField(ogr.FieldDefn(name, ogr.OFTReal if kind is float else ogr.OFTString))
    layer.StartTransaction()
    for item in items:
        feature = ogr.Feature(layer.GetLayerDefn())
        for name, kind in fields.items():
            feature[name] = kind(item[name])
        feature.SetGeometry(ogr.CreateGeometryFromWkt(polygon(item["shape"])))
        layer.CreateFeature(feature)
    layer.CommitTransaction()


def polygon(shape):
    points = [(WEST_M + x, SOUTH_M + y) for x, y in list(shape) + [shape[0]]]
    return "POLYGON((" + ",".join(f"{x:.2f} {y:.2f}" for x, y in points) + "))"


def write_classes(path):
    columns = ("code", "name", "kind", "scale", "albedo", "albedo_low", "albedo_high", "emissivity", "source")
    with open(path, "w", encoding="utf-8", newline="") as out:
        rows = csv.writer(out, lineterminator="\n")
        rows.writerow(columns)
        rows.writerows([getattr(c, name) for name in columns] for c in CLASSES)


def write_note(path):
    path.write_text(f"""The demo town

Everything here is invented: the place, its houses, parcels, owners and weather. No real town is shown, and
nothing was measured. A script made it with a fixed seed, so it is the same on every run.

The corner is at easting {WEST_M:.0f}, northing {SOUTH_M:.0f} in EPSG:{EPSG}, 3 km by 3 km in pixels of 2 m. These
coordinates were picked at will; whatever really lies there has nothing to do with this town.

cover.tif         land cover in ESA WorldCover codes (roofs and roads are both 50, built-up)
cover_detail.tif  the same ground in the town's own codes, explained by town_classes.csv
town_classes.csv  code, name, kind, albedo with its range, emissivity, source (the values are published or common ones)
surface.tif       height of the surface in metres: roofs, tree crowns, bridges, water
ground.tif        height of the bare ground in metres
parcels.gpkg      parcels with use and type of owner (layer parcels)
roofs.gpkg        roofs with kind (flat or pitched), height, material, albedo (layer roofs)
planting.gpkg     places on parking lots where trees could stand, with their height (layer planting)
station.csv       a year of hourly weather; stamps are the start of each hour, UTC; sun in W/m2 (sun_beam is
                  normal to the beam), air and ground in degrees Celsius, hum in %, press in hPa, wind in m/s, okta 0-8
""", encoding="utf-8")
