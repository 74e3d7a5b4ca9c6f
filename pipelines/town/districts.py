"""Roads, railway and the built districts, each a grid of blocks cut into parcels."""

import numpy as np

from .canvas import area, part, sides
from .classes import BALLAST, DARK, GRAVEL, LAWN, METAL, PALE, PARKING, PATH, PAVING, ROAD, SLATE, SOIL, TILE, WATER
from .land import rail_y, river_y

CENTRE = np.array([1450.0, 1530.0])
OLD_TOWN_M = 385.0  # radius inside the ring road


def lay_main_roads(canvas):
    """The ring, the roads out of the town and the bridges. Bridges stand in the surface, not in the ground."""
    turn = np.linspace(0, 2 * np.pi, 80)
    ring = wobble(np.stack([CENTRE[0] + OLD_TOWN_M * np.cos(turn), CENTRE[1] + OLD_TOWN_M * np.sin(turn)], 1))
    west = [wobble(CENTRE + (-OLD_TOWN_M, 20)), (760, 1585), (300, 1640), (-20, 1610)]
    north = [wobble(CENTRE + (60, OLD_TOWN_M)), (1560, 2150), (1500, 2560), (1640, 3020)]
    east = [wobble(CENTRE + (OLD_TOWN_M, 0)), (2200, 1500), (2600, 1540), (3020, 1480)]
    south = [wobble(CENTRE + (0, -OLD_TOWN_M)), (1455, 1000), (1440, 780), (1420, 420), (1480, -20)]
    bypass = [(1440, 780), (1900, 742), (2500, 700), (3020, 720)]
    lake = [(1440, 780), (1150, 770), (930, 720), (900, 400), (640, 300), (300, 240), (-20, 280)]
    east_bridge = [(2200, 1500), (2230, 1200), (2210, 960), (2190, 720)]
    roads = np.zeros_like(canvas.taken)
    for path, width in ((ring, 20), (west, 12), (north, 12), (east, 12), (south, 14), (bypass, 14), (lake, 10), (east_bridge, 12)):
        path = path if path is ring else smooth(path)
        mask = canvas.line(path, width)
        lift_bridge(canvas, path, mask)
        roads |= mask
    canvas.detail[roads] = ROAD
    canvas.taken |= roads
    for a in turn[::2]:  # an avenue
        for reach in (OLD_TOWN_M - 13, OLD_TOWN_M + 13):
            x, y = wobble(CENTRE + reach * np.array([np.cos(a), np.sin(a)]))
            if abs(y - river_y(x)) > 40:
                canvas.tree(x, y, canvas.rng.uniform(3, 4.5), canvas.rng.uniform(9, 14))


def smooth(path):
    """Rounds the corners of a polyline by cutting them three times (Chaikin 1974)."""
    p = np.asarray(path, float)
    for _ in range(3):
        inner = np.stack([0.75 * p[:-1] + 0.25 * p[1:], 0.25 * p[:-1] + 0.75 * p[1:]], 1).reshape(-1, 2)
        p = np.concatenate([p[:1], inner, p[-1:]])
    return p


def lift_bridge(canvas, path, mask):
    """Where a road crosses water its deck runs level, four metres above the water."""
    over = mask & (canvas.detail == WATER)
    if over.any():
        canvas.surface[over] = canvas.ground[over].max() + 4.0


def wobble(points):
    """Bends what would be drawn with compasses: old streets are not circles."""
    p = np.asarray(points, float)
    x, y = p[..., 0], p[..., 1]
    return np.stack([x + 13 * np.sin(y / 97) + 8 * np.sin(y / 41 + x / 150), y + 11 * np.sin(x / 83 + 1) + 6 * np.sin(x / 37)], -1)


def lay_railway(canvas):
    """Two tracks in a shallow curve, a wide yard by the station, a platform roof."""
    x, y = canvas.x[None, :], canvas.y[:, None]
    yard = np.exp(-(((x - 1650) / 330) ** 4))
    bed = np.abs(y - rail_y(x)) < 6 + 24 * yard
    bed &= canvas.detail != WATER
    crossing = canvas.detail == ROAD
    canvas.detail[bed & ~crossing] = BALLAST
    canvas.taken |= np.abs(y - rail_y(x)) < 14 + 26 * yard
    x0 = 1570
    station = [(x0, rail_y(x0) + 33), (x0 + 90, rail_y(x0 + 90) + 33), (x0 + 90, rail_y(x0 + 90) + 51), (x0, rail_y(x0) + 51)]
    forecourt = part(station, -0.2, 1.2, 0.0, 2.1)
    canvas.paint(forecourt, PAVING)
    parcel = canvas.parcel(forecourt, "station", "railway")
    canvas.building(station, SLATE, 9.0, 0.55, True, parcel)
    platform = [(x0 - 40, rail_y(x0 - 40) + 12), (x0 + 150, rail_y(x0 + 150) + 12), (x0 + 150, rail_y(x0 + 150) + 20), (x0 - 40, rail_y(x0 - 40) + 20)]
    canvas.building(platform, METAL, 4.5, 0.0, False, parcel)
    canvas.taken[canvas.window(forecourt)] = True


def blocks(origin, angle_deg, counts, size, street_m, bend=0.0):
    """Corners of the blocks of a street grid, and of each block with its half of the streets around."""
    turn = np.radians(angle_deg)
    along, across = np.array([np.cos(turn), np.sin(turn)]), np.array([-np.sin(turn), np.cos(turn)])

    def at(u, v):
        return np.asarray(origin) + (u + bend * np.sin(v / 240)) * along + (v + bend * np.sin(u / 310)) * across

    def quad(u, v, margin):
        return [at(u - margin, v - margin), at(u + size[0] + margin, v - margin),
                at(u + size[0] + margin, v + size[1] + margin), at(u - margin, v + size[1] + margin)]

    for i in range(counts[0]):
        for j in range(counts[1]):
            u, v = i * (size[0] + street_m), j * (size[1] + street_m)
            yield quad(u, v, 0.0), quad(u, v, 2.0), quad(u, v, street_m - 2.0)


def lay_district(canvas, grid, cut, build, least=0.4, outline=None):
    """Lays the blocks that find room: streets, pavements, then parcels filled by `build`."""
    room, streets = ~canvas.taken, np.zeros_like(canvas.taken)
    if outline is not None:
        room &= outline
    for block, pavement, street in grid:
        lots = cut(block, canvas.rng)
        parcels = [lot for lot in lots if canvas.free(lot, room)]
        if len(parcels) < least * len(lots):
            continue
        laid = ~canvas.taken
        canvas.paint(street, ROAD, laid & room)
        canvas.paint(pavement, PAVING, laid & room)
        canvas.paint(block, LAWN, room)
        win, mask = canvas.inside(street)
        streets[win][mask] = True
        for parcel in parcels:
            canvas.take(parcel)
            build(canvas, parcel)
        canvas.take(block)
    canvas.taken |= streets


def two_rows(count):
    """Parcels back to back, each with its front to a street."""
    def cut(block, rng):
        flipped = [block[2], block[3], block[0], block[1]]
        return [lot for row in (block, flipped) for lot in slices(part(row, 0, 1, 0, 0.5), count, rng)]
    return cut


def one_row(*counts):
    """Parcels from street to street; how many is drawn for each block."""
    return lambda block, rng: slices(block, int(rng.choice(counts)), rng)


def slices(row, count, rng):
    cuts = np.arange(count + 1) / count
    cuts[1:-1] += rng.uniform(-0.12, 0.12, count - 1) / count
    return [part(row, a, b, 0, 1) for a, b in zip(cuts[:-1], cuts[1:])]


def house(canvas, parcel):
    """A family house with a pitched roof, a drive, sometimes a garage, and a garden."""
    rng = canvas.rng
    width, depth = sides(parcel)
    owner = rng.choice(["private", "private", "private", "cooperative"])
    name = canvas.parcel(parcel, "housing", owner)
    canvas.scatter_trees(part(parcel, 0, 1, 0.6, 1), 75, (1.5, 3.6), (3, 10))
    if rng.random() < 0.04:
        return  # not built yet: a garden
    w, d = min(rng.uniform(9.5, 13), width - 5), rng.uniform(8.5, 11.5)
    s, t = rng.uniform(2, width - w - 2.5) / width, rng.uniform(4, 7.5) / depth
    canvas.paint(part(parcel, s - 2.6 / width, s + 1 / width, 0, t + d / depth), PAVING)
    if rng.random() < 0.35:
        canvas.paint(part(parcel, s, s + w / width, t + d / depth, t + (d + 4) / depth), PAVING)
    code = rng.choice([TILE, TILE, TILE, SLATE, DARK], p=[0.3, 0.3, 0.12, 0.2, 0.08])
    shape = part(parcel, s, s + w / width, t, t + d / depth)
    if code == DARK:
        canvas.building(shape, DARK, rng.uniform(6, 7.5), 0.0, False, name)
    else:
        canvas.building(shape, code, rng.uniform(3.6, 6.2), rng.uniform(0.65, 1.0), rng.random() < 0.25, name)
    if width - (s * width + w) > 5.5 and rng.random() < 0.6:
        garage = part(parcel, s + (w + 1) / width, s + (w + 5) / width, t + 2 / depth, t + 9 / depth)
        canvas.building(garage, rng.choice([DARK, GRAVEL]), 2.8, 0.0, False, name)


def flats(canvas, parcel):
    """Slabs with flat roofs among lawns, and their parking."""
    rng = canvas.rng
    width, depth = sides(parcel)
    name = canvas.parcel(parcel, "apartments", rng.choice(["cooperative", "municipal", "company"]))
    canvas.scatter_trees(parcel, 40, (2.5, 4.5), (6, 16))
    canvas.paint(part(parcel, 0.06, 0.94, 0.42, 0.60), PARKING)
    if rng.random() < 0.12:
        tower = part(parcel, 0.3, 0.3 + 22 / width, 0.08, 0.08 + 22 / depth)
        canvas.building(tower, GRAVEL, rng.uniform(38, 46), 0.0, False, name)
    else:
        storeys = rng.integers(4, 8)
        canvas.building(part(parcel, 0.08, 0.92, 0.07, 0.07 + 13 / depth), rng.choice([DARK, GRAVEL, PALE], p=[0.5, 0.35, 0.15]),
                        3.0 * storeys, 0.0, False, name)
    canvas.building(part(parcel, 0.12, 0.8, 0.95 - 12 / depth, 0.95), rng.choice([DARK, GRAVEL]), 3.0 * rng.integers(3, 6), 0.0, False, name)


def works(canvas, parcel):
    """Halls with large flat roofs, yards of concrete, parking; some lots lie bare."""
    rng = canvas.rng
    name = canvas.parcel(parcel, rng.choice(["industry", "industry", "storage", "retail"]), rng.choice(["company", "company", "municipal"]))
    canvas.paint(part(parcel, 0.03, 0.97, 0.03, 0.97), PAVING)
    if rng.random() < 0.08:
        canvas.paint(part(parcel, 0.04, 0.96, 0.04, 0.96), SOIL)
        return
    s1, t0, t1 = rng.uniform(0.55, 0.8), rng.uniform(0.24, 0.34), rng.uniform(0.8, 0.93)
    canvas.paint(part(parcel, 0.05, 0.95, 0.05, t0 - 0.04), PARKING)
    for row in (0.09, 0.16):
        for s in np.arange(0.1, 0.92, 0.11):
            if rng.random() < 0.6:
                x, y = part(parcel, s, s, row, row)[0]
                canvas.tree(x, y, rng.uniform(1.8, 3), rng.uniform(4, 7))
    code = rng.choice([DARK, PALE, GRAVEL, METAL], p=[0.42, 0.2, 0.18, 0.2])
    high = rng.uniform(7, 13)
    hall = part(parcel, 0.07, s1, t0, t1)
    if code == METAL:
        canvas.building(hall, METAL, high, 0.06, False, name)
    else:
        canvas.building(hall, code, high, 0.0, False, name)
        for _ in range(rng.integers(2, 7)):  # plant on the roof
            s, t = rng.uniform(0.05, 0.9), rng.uniform(0.05, 0.9)
            win, mask = canvas.inside(part(hall, s, s + 0.05, t, t + 0.06))
            canvas.surface[win][mask] += 2.2
    if rng.random() < 0.6:
        canvas.building(part(parcel, s1 + 0.06, 0.94, t0, t0 + 0.3), rng.choice([DARK, GRAVEL, PALE]), rng.uniform(5, 11), 0.0, False, name)


def allotment(canvas, parcel):
    """A rented garden: beds, fruit trees, a hut."""
    rng = canvas.rng
    width, depth = sides(parcel)
    name = canvas.parcel(parcel, "allotment", "municipal")
    s, t = rng.uniform(0.1, 0.5, 2)
    canvas.paint(part(parcel, s, s + 0.45, t, t + 0.4), SOIL)
    canvas.scatter_trees(parcel, 110, (1.2, 2.4), (2.5, 5))
    canvas.building(part(parcel, 0.1, 0.1 + 6 / width, 0.72, 0.72 + 5 / depth), rng.choice([TILE, DARK, METAL]), 2.4, 0.3, False, name)


def school(canvas, parcel):
    """A school with two wings, a hard court and a sports field."""
    name = canvas.parcel(parcel, "school", "municipal")
    canvas.paint(part(parcel, 0.05, 0.45, 0.05, 0.95), PAVING)
    canvas.building(part(parcel, 0.08, 0.42, 0.08, 0.26), GRAVEL, 10.5, 0.0, False, name)
    canvas.building(part(parcel, 0.08, 0.20, 0.34, 0.86), TILE, 9.0, 0.6, True, name)
    canvas.paint(part(parcel, 0.5, 0.95, 0.12, 0.88), SOIL)
    canvas.paint(part(parcel, 0.53, 0.92, 0.2, 0.8), LAWN)
    canvas.scatter_trees(part(parcel, 0.0, 1.0, 0.9, 1.0), 160, (2.5, 4.5), (7, 14))


def lay_old_town(canvas):
    """Irregular blocks inside the ring, narrow houses around their courtyards, a market and a church."""
    x, y = canvas.x[None, :], canvas.y[:, None]
    reach = np.hypot(x - CENTRE[0], y - CENTRE[1])
    canvas.detail[~canvas.taken & (reach < OLD_TOWN_M)] = PAVING
    room = ~canvas.taken
    turn = np.linspace(0, 2 * np.pi, 25)[:-1]
    whole = CENTRE + (OLD_TOWN_M - 22) * np.stack([np.cos(turn), np.sin(turn)], 1)
    for k, block in enumerate(split(whole, canvas.rng, 5000)):
        middle = block.mean(0)
        if np.hypot(*(middle - CENTRE)) < 62 or k % 23 == 5:
            continue  # the market, and a few small squares
        town_block(canvas, shrink(block, canvas.rng.uniform(2.6, 4.2)), room)
    lay_church(canvas)
    canvas.taken |= reach < OLD_TOWN_M


def split(shape, rng, largest_m2):
    """Cuts a convex shape across its longer direction, slightly askew, until the pieces are small."""
    if area(shape) < largest_m2 * rng.uniform(0.7, 1.3):
        return [shape]
    turn = np.linspace(0, np.pi, 24, endpoint=False)
    directions = np.stack([np.cos(turn), np.sin(turn)], 1)
    narrow = directions[np.argmin(np.ptp(shape @ directions.T, axis=0))]
    longest = np.array([-narrow[1], narrow[0]])
    askew = rng.normal(0, 0.13)
    normal = np.array([[np.cos(askew), -np.sin(askew)], [np.sin(askew), np.cos(askew)]]) @ longest
    through = shape.mean(0) + longest * rng.uniform(-0.1, 0.1) * np.ptp(shape @ longest)
    halves = (cut_off(shape, through, normal), cut_off(shape, through, -normal))
    return [piece for half in halves for piece in split(half, rng, largest_m2)]


def cut_off(shape, point, normal):
    """The part of a convex shape on the side the normal points to."""
    kept = []
    for a, b in zip(shape, np.roll(shape, -1, axis=0)):
        da, db = (a - point) @ normal, (b - point) @ normal
        if da >= 0:
            kept.append(a)
        if (da >= 0) != (db >= 0):
            kept.append(a + (b - a) * da / (da - db))
    return np.array(kept)


def shrink(shape, margin_m):
    """The convex shape with every side moved inward (corners run counter-clockwise)."""
    inner = shape
    for a, b in zip(shape, np.roll(shape, -1, axis=0)):
        along = (b - a) / max(np.hypot(*(b - a)), 1e-9)
        inward = np.array([-along[1], along[0]])
        inner = cut_off(inner, a + margin_m * inward, inward)
    return inner


def town_block(canvas, block, room):
    """Lots fan out from a courtyard in the middle to the streets all round."""
    middle = block.mean(0)
    for a, b in zip(block, np.roll(block, -1, axis=0)):
        lots = max(1, round(np.hypot(*(b - a)) / canvas.rng.uniform(14, 22)))
        for i in range(lots):
            front = a + (b - a) * i / lots, a + (b - a) * (i + 1) / lots
            lot = [front[0], front[1], front[1] + 0.86 * (middle - front[1]), front[0] + 0.86 * (middle - front[0])]
            if area(lot) > 60 and canvas.free(lot, room):
                town_house(canvas, lot)


def town_house(canvas, parcel):
    rng = canvas.rng
    depth = np.hypot(*((parcel[2] + parcel[3]) - (parcel[0] + parcel[1]))) / 2
    name = canvas.parcel(parcel, rng.choice(["mixed", "mixed", "housing", "shop"]), rng.choice(["private", "company", "church", "municipal"], p=[0.7, 0.15, 0.07, 0.08]))
    deep = min(rng.uniform(11, 14), 0.7 * depth) / depth
    canvas.paint(part(parcel, 0, 1, deep, 1), rng.choice([PAVING, LAWN, PATH], p=[0.45, 0.35, 0.2]))
    canvas.scatter_trees(part(parcel, 0.1, 0.9, deep + 0.15, 0.95), 60, (1.8, 3.4), (4, 9))
    code = rng.choice([TILE, SLATE, DARK], p=[0.74, 0.16, 0.10])
    canvas.building(part(parcel, 0, 1, 0, deep), code, rng.uniform(8.5, 14), 0.0 if code == DARK else rng.uniform(0.7, 1.05), False, name)
    if rng.random() < 0.4:
        canvas.building(part(parcel, 0.0, 0.45, deep, min(deep + 0.3, 0.97)), rng.choice([DARK, TILE]), rng.uniform(3.5, 7), 0.0, False, name)


def lay_church(canvas):
    nave = [CENTRE + p for p in np.array([(-8.0, -9.0), (30.0, -9.0), (30.0, 9.0), (-8.0, 9.0)])]
    plot = [CENTRE + p for p in np.array([(-22.0, -15.0), (36.0, -15.0), (36.0, 15.0), (-22.0, 15.0)])]
    name = canvas.parcel(plot, "church", "church")
    canvas.building(nave, SLATE, 13.0, 1.4, False, name)
    tower = [CENTRE + p for p in np.array([(-19.0, -5.5), (-8.0, -5.5), (-8.0, 5.5), (-19.0, 5.5)])]
    canvas.building(tower, SLATE, 34.0, 2.6, True, name)
