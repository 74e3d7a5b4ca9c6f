"""The town's own surface classes, and what each is called in ESA WorldCover's codes."""

from collections import namedtuple

Class = namedtuple("Class", "code name kind scale albedo albedo_low albedo_high emissivity source worldcover colour")

OKE = "Oke 1987 Boundary Layer Climates (range; from memory)"
FAO = "FAO-56 eq. 38 (reference grass 0.23); range Oke 1987 (from memory)"
COMMON = "common practice"

# A typical value is the middle of the published range unless the source names one. An emissivity
# stands beside an albedo of the same source.
CLASSES = [
    Class(1, "flat roof, dark membrane", "roof", "facet", 0.10, 0.05, 0.18, 0.92, OKE + " tar and gravel; black paint", 50, (70, 70, 76)),
    Class(2, "flat roof, pale membrane", "roof", "facet", 0.60, 0.50, 0.70, 0.90, COMMON + ": aged white coating 0.55-0.65", 50, (232, 232, 226)),
    Class(3, "tile roof", "roof", "facet", 0.22, 0.10, 0.35, 0.90, OKE + " tile", 50, (178, 84, 62)),
    Class(4, "asphalt road", "paved", "facet", 0.12, 0.05, 0.20, 0.95, OKE + " asphalt road", 50, (120, 120, 124)),
    Class(5, "concrete paving", "paved", "facet", 0.25, 0.10, 0.35, 0.85, OKE + " concrete", 50, (190, 186, 178)),
    Class(6, "parking lot, worn asphalt", "paved", "facet", 0.13, 0.05, 0.20, 0.95, OKE + " asphalt road", 50, (98, 98, 104)),
    Class(7, "lawn", "grass", "facet", 0.23, 0.16, 0.26, 0.93, FAO, 30, (142, 190, 104)),
    Class(8, "trees", "tree", "facet", 0.18, 0.15, 0.20, 0.97, OKE + " deciduous forest", 10, (44, 110, 58)),
    Class(9, "field in crop", "crop", "facet", 0.21, 0.18, 0.25, 0.95, OKE + " crops", 40, (214, 200, 116)),
    Class(10, "bare soil", "bare", "facet", 0.17, 0.05, 0.40, 0.94, OKE + " soil dark wet to light dry", 60, (158, 124, 88)),
    Class(11, "water", "water", "facet", 0.06, 0.03, 0.10, 0.95, OKE + " water at small zenith angle", 80, (70, 130, 190)),
    Class(12, "railway ballast", "bare", "facet", 0.20, 0.10, 0.35, 0.92, OKE + " stone; concrete", 50, (136, 120, 112)),
    Class(13, "flat roof, gravel", "roof", "facet", 0.13, 0.08, 0.18, 0.92, OKE + " tar and gravel", 50, (150, 146, 140)),
    Class(14, "slate roof", "roof", "facet", 0.10, 0.08, 0.14, 0.90, OKE + " slate (range: " + COMMON + ")", 50, (86, 90, 104)),
    Class(15, "metal sheet roof", "roof", "facet", 0.13, 0.10, 0.16, 0.20, OKE + " corrugated iron", 50, (168, 178, 188)),
    Class(16, "gravel path", "paved", "facet", 0.22, 0.10, 0.35, 0.92, OKE + " stone (range: " + COMMON + ")", 50, (206, 194, 164)),
    Class(17, "meadow", "grass", "facet", 0.20, 0.16, 0.26, 0.94, OKE + " grass 1 m to 0.02 m", 30, (176, 206, 128)),
]

CODE = {c.name: c.code for c in CLASSES}
BY_CODE = {c.code: c for c in CLASSES}

DARK, PALE, TILE, ROAD, PAVING, PARKING, LAWN, TREES, CROP, SOIL, WATER, BALLAST, GRAVEL, SLATE, METAL, PATH, MEADOW = (
    c.code for c in CLASSES)
ROOFS = (DARK, PALE, TILE, GRAVEL, SLATE, METAL)

WORLDCOVER_COLOURS = {  # only the codes this town uses; colours of our own
    10: (44, 110, 58), 30: (160, 200, 110), 40: (214, 200, 116), 50: (170, 80, 76), 60: (180, 160, 130), 80: (70, 130, 190)}
