"""Hills, river, lake, woods and fields: the country the town is built in."""

import numpy as np

from .canvas import part
from .classes import CROP, LAWN, MEADOW, PATH, SOIL, TREES, WATER

VALLEY_M = 240.0  # height of the meadows beside the river


def noise(rng, size, cell, longest_m, shortest_m, fall=2.0):
    """A smooth random field of mean 0 and spread 1, with waves between the two lengths."""
    white = np.fft.rfft2(rng.standard_normal((size, size)))
    fy, fx = np.fft.fftfreq(size, cell)[:, None], np.fft.rfftfreq(size, cell)[None, :]
    f = np.hypot(fx, fy)
    keep = (f >= 1 / longest_m) & (f <= 1 / shortest_m)
    field = np.fft.irfft2(np.where(keep, white / np.maximum(f, 1e-9) ** fall, 0), s=(size, size))
    return (field - field.mean()) / field.std()


def river_y(x):
    return 1085 + 70 * np.sin(x / 410 + 0.6) + 28 * np.sin(x / 173 + 2.0)


def rail_y(x):
    return 852 + 45 * np.sin(x / 900 - 0.4) - 0.03 * x


def step(v):
    """0 below 0, 1 above 1, smooth between."""
    v = np.clip(v, 0, 1)
    return v * v * (3 - 2 * v)


def shape_ground(canvas):
    x, y = canvas.x[None, :], canvas.y[:, None]
    rough = noise(canvas.rng, canvas.size, canvas.cell, 1600, 120)
    fine = noise(canvas.rng, canvas.size, canvas.cell, 200, 20, 1.5)
    from_river = y - river_y(x)
    north = 150 * step((from_river - 900 - 120 * np.sin(x / 500)) / 1100)
    south = 75 * step((-from_river - 420 - 140 * np.sin(x / 430 + 1)) / 900)
    terrace = 9 * step((np.abs(from_river) - 40) / 420)
    hilly = step((north + south) / 70)
    fall_of_valley = -0.0012 * x
    canvas.ground = VALLEY_M + fall_of_valley + terrace + north + south + rough * (0.8 + 16 * hilly) + 0.12 * fine


def lay_water(canvas):
    """River and lake, with banks carved so that water is the lowest thing about."""
    x, y = canvas.x[None, :], canvas.y[:, None]
    bend = noise(canvas.rng, canvas.size, canvas.cell, 500, 60)
    half = 21 + 3 * bend
    to_river = np.abs(y - river_y(x)) * 0.94 - half
    to_lake = (np.hypot((x - 560) / 1.55, y - 560) - 165 - 12 * bend)
    level = VALLEY_M - 4.0 - 0.0012 * x
    for distance, height in ((to_river, level), (to_lake, np.full_like(level, VALLEY_M - 2.5))):
        bank = height + 0.6 + np.clip(distance, 0, None) * 0.22
        near = (distance > 0) & (distance < 60)
        canvas.ground = np.where(near, np.minimum(canvas.ground, bank), canvas.ground)
        canvas.ground = np.where(distance <= 0, height, canvas.ground)
    canvas.detail[:] = MEADOW
    canvas.detail[(to_river <= 0) | (to_lake <= 0)] = WATER
    canvas.taken |= (to_river < 14) | (to_lake < 25)
    # Trees along the banks, where the town has no quay.
    for x0 in canvas.rng.uniform(0, 3000, 700):
        side = canvas.rng.choice([-1, 1])
        if 1180 < x0 < 1760:
            continue
        canvas.tree(x0, river_y(x0) + side * canvas.rng.uniform(27, 36), canvas.rng.uniform(2.5, 5), canvas.rng.uniform(8, 18))
    for turn in canvas.rng.uniform(0, 2 * np.pi, 160):
        reach = canvas.rng.uniform(180, 205)
        canvas.tree(560 + 1.55 * reach * np.cos(turn), 560 + reach * np.sin(turn), canvas.rng.uniform(2.5, 5), canvas.rng.uniform(7, 16))


def near(mask, cell, reach_m):
    """Where a square of that half-width holds any of the mask."""
    half = int(reach_m / cell)
    wide = mask.astype(np.int32)
    for axis in (0, 1):
        sums = np.cumsum(np.pad(wide, [(half + 1, half) if a == axis else (0, 0) for a in (0, 1)], mode="edge"), axis)
        ends = np.take(sums, np.arange(2 * half + 1, sums.shape[axis]), axis)
        wide = ends - np.take(sums, np.arange(0, mask.shape[axis]), axis)
    return wide > 0


def close(mask, cell, reach_m):
    """The mask with gaps narrower than twice the reach filled."""
    return ~near(~near(mask, cell, reach_m), cell, reach_m)


def lay_woods(canvas):
    """Closed woods on the hills and a few copses, away from all that is built."""
    patchy = noise(canvas.rng, canvas.size, canvas.cell, 800, 45, 1.6)
    high = (canvas.ground - VALLEY_M - 50) / 40
    woods = (high + 1.1 * patchy > 0.9) & (high > -0.6) | (patchy > 1.9)
    woods &= ~near(canvas.taken, canvas.cell, 34)
    crowns = noise(canvas.rng, canvas.size, canvas.cell, 30, 8, 0.8)
    stand = 17 + 3 * noise(canvas.rng, canvas.size, canvas.cell, 600, 150)
    canvas.surface[woods] = (canvas.ground + np.clip(stand + 1.5 * crowns, 6, 30))[woods]
    canvas.detail[woods] = TREES
    return woods


def lay_greens(canvas, town):
    """What is left over inside the town: grass with some trees."""
    left = town & ~canvas.taken
    canvas.detail[left] = LAWN
    rows, columns = np.nonzero(left)
    for i in canvas.rng.choice(len(rows), len(rows) * 4 // 900, replace=False):
        canvas.tree(canvas.x[columns[i]], canvas.y[rows[i]], canvas.rng.uniform(2, 4.5), canvas.rng.uniform(5, 14))


def lay_fields(canvas, keep_out):
    """Long fields in blocks between tracks, wherever nothing else lies."""
    rng, room = canvas.rng, ~canvas.taken & ~keep_out
    turn = np.radians(17)
    along, across = np.array([np.cos(turn), np.sin(turn)]), np.array([-np.sin(turn), np.cos(turn)])
    middle = np.array([1500.0, 1500.0])
    for u in np.arange(-2300, 2300, 236):
        v = -2300.0
        while v < 2300:
            depth = rng.uniform(34, 92)
            shift = 18 * np.sin(v / 260)
            corners = [(u + shift, v), (u + shift + 230, v), (u + shift + 230, v + depth), (u + shift, v + depth)]
            quad = [middle + a * along + b * across for a, b in corners]
            v += depth + (6 if rng.random() < 0.25 else 0)
            plough(canvas, quad, room)


def plough(canvas, quad, room):
    code = canvas.rng.choice([CROP, MEADOW, SOIL], p=[0.6, 0.22, 0.18])
    win, mask = canvas.inside(quad)
    mask &= room[win]
    if not mask.any():
        return
    canvas.detail[win][mask] = code
    if canvas.free(quad, room):
        canvas.parcel(quad, "field", canvas.rng.choice(["private", "church", "municipal"], p=[0.8, 0.08, 0.12]))
        if canvas.rng.random() < 0.3:  # a hedge on one side
            for s in canvas.rng.uniform(0, 1, 28):
                x, y = part(quad, s, s, 0, 0)[0]
                canvas.tree(x, y, canvas.rng.uniform(1.5, 3), canvas.rng.uniform(3, 8))


def lay_park(canvas, centre, radii, owner="municipal"):
    """Lawn, groups of trees, two crossing paths, a pond."""
    x, y = canvas.x[None, :], canvas.y[:, None]
    reach = np.hypot((x - centre[0]) / radii[0], (y - centre[1]) / radii[1])
    park = (reach <= 1) & ~canvas.taken
    canvas.detail[park] = LAWN
    for shift in (-0.4, 0.35):
        turn = np.linspace(-1.2, 1.2, 30)
        path = np.stack([centre[0] + radii[0] * turn, centre[1] + radii[1] * (shift + 0.35 * np.sin(2.5 * turn))], 1)
        canvas.detail[canvas.line(path, 4) & park] = PATH
    pond = (np.hypot((x - centre[0] - 0.45 * radii[0]) / 1.7, y - centre[1]) < 16) & park
    canvas.detail[pond] = WATER
    canvas.ground[pond] = canvas.ground[pond].min() - 0.5
    canvas.surface[pond] = canvas.ground[pond]
    for _ in range(int(radii[0] * radii[1] * np.pi / 260)):
        r, turn = np.sqrt(canvas.rng.uniform(0, 0.92)), canvas.rng.uniform(0, 2 * np.pi)
        if np.sin(3 * turn + 5 * r) < -0.1:
            continue  # open lawn
        px, py = centre[0] + radii[0] * r * np.cos(turn), centre[1] + radii[1] * r * np.sin(turn)
        if park[int(canvas.size - py / canvas.cell), int(px / canvas.cell)]:
            canvas.tree(px, py, canvas.rng.uniform(2.5, 6), canvas.rng.uniform(8, 22))
    corner = [(centre[0] + a * radii[0] * 0.7, centre[1] + b * radii[1] * 0.7) for a, b in ((-1, -1), (1, -1), (1, 1), (-1, 1))]
    canvas.parcel(corner, "park", owner)
    canvas.taken |= park
