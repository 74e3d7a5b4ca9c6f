"""The rasters being painted, in metres from the south-western corner, and drawing on them."""

import numpy as np

from .classes import BY_CODE, ROOFS, TREES, WATER


def part(quad, s0, s1, t0, t1):
    """The piece of a four-cornered shape between fractions s along its front and t from front to back."""
    p = np.asarray(quad, float)

    def at(s, t):
        return (1 - t) * ((1 - s) * p[0] + s * p[1]) + t * ((1 - s) * p[3] + s * p[2])

    return [at(s0, t0), at(s1, t0), at(s1, t1), at(s0, t1)]


def sides(quad):
    """Mean width (along the front) and depth in metres."""
    p = np.asarray(quad, float)
    width = (np.hypot(*(p[1] - p[0])) + np.hypot(*(p[2] - p[3]))) / 2
    depth = (np.hypot(*(p[3] - p[0])) + np.hypot(*(p[2] - p[1]))) / 2
    return width, depth


def area(quad):
    p = np.asarray(quad, float)
    x, y = p[:, 0], p[:, 1]
    return abs(np.dot(x, np.roll(y, -1)) - np.dot(y, np.roll(x, -1))) / 2


class Canvas:
    def __init__(self, size, cell, rng):
        self.size, self.cell, self.rng = size, cell, rng
        self.x = (np.arange(size) + 0.5) * cell
        self.y = (size - np.arange(size) - 0.5) * cell
        self.ground = np.zeros((size, size))
        self.surface = None  # starts as a copy of the ground
        self.detail = np.zeros((size, size), np.uint8)
        self.taken = np.zeros((size, size), bool)  # where nothing more may be built
        self.parcels, self.roofs, self.trees = [], [], []

    def window(self, points, margin=0.0):
        p = np.asarray(points, float)
        c0, c1 = (p[:, 0].min() - margin) / self.cell, (p[:, 0].max() + margin) / self.cell
        r0, r1 = self.size - (p[:, 1].max() + margin) / self.cell, self.size - (p[:, 1].min() - margin) / self.cell
        clip = lambda v: int(min(max(v, 0), self.size))
        return slice(clip(r0), clip(r1 + 1)), slice(clip(c0), clip(c1 + 1))

    def edges(self, quad):
        """Window of a convex shape and, per edge, each pixel's distance to it (positive inside)."""
        p = np.asarray(quad, float)
        win = self.window(p)
        x, y = self.x[win[1]][None, :], self.y[win[0]][:, None]
        q = np.roll(p, -1, axis=0)
        turn = np.sign(np.sum(p[:, 0] * q[:, 1] - p[:, 1] * q[:, 0]))
        along = (q - p) / np.hypot(*(q - p).T)[:, None] * turn
        return win, [(y - a[1]) * d[0] - (x - a[0]) * d[1] for a, d in zip(p, along)]

    def inside(self, quad):
        win, distance = self.edges(quad)
        return win, np.minimum.reduce(distance) >= 0

    def within(self, quad):
        """Whether the whole shape lies on the canvas."""
        p, far = np.asarray(quad, float), self.size * self.cell
        return p.min() >= 0 and p.max() <= far

    def free(self, quad, room):
        if not self.within(quad):
            return False
        win, mask = self.inside(quad)
        return bool(mask.any()) and bool(room[win][mask].all())

    def paint(self, quad, code, only=None):
        """Gives the ground there a class; roofs that stand on it stay."""
        win, mask = self.inside(quad)
        mask &= ~np.isin(self.detail[win], ROOFS)
        if only is not None:
            mask &= only[win]
        self.detail[win][mask] = code

    def take(self, quad):
        win, mask = self.inside(quad)
        self.taken[win][mask] = True

    def line(self, points, width):
        """Mask of a road of that width along a polyline."""
        mask = np.zeros_like(self.taken)
        p = np.asarray(points, float)
        for a, b in zip(p[:-1], p[1:]):
            win = self.window([a, b], width)
            x, y = self.x[win[1]][None, :] - a[0], self.y[win[0]][:, None] - a[1]
            d = b - a
            t = np.clip((x * d[0] + y * d[1]) / (d @ d), 0, 1)
            mask[win] |= np.hypot(x - t * d[0], y - t * d[1]) <= width / 2
        return mask

    def parcel(self, quad, use, owner):
        self.parcels.append({"parcel_id": f"P-{len(self.parcels) + 1:04d}", "use": use, "owner_type": owner,
                             "area_m2": round(area(quad), 1), "shape": quad})
        return self.parcels[-1]["parcel_id"]

    def building(self, quad, code, eaves_m, pitch=0.0, hip=False, parcel=""):
        """A building whose front is the quad's first edge; pitch = rise over run, 0 for a flat roof."""
        win, distance = self.edges(quad)
        mask = np.minimum.reduce(distance) >= 0
        if mask.sum() < 6:
            return
        from_eaves = np.minimum.reduce(distance if hip else [distance[0], distance[2]])
        height = eaves_m + pitch * from_eaves
        base = self.ground[win][mask].mean()
        self.surface[win][mask] = (base + height)[mask]
        self.detail[win][mask] = code
        centre = BY_CODE[code]
        spread = (centre.albedo_high - centre.albedo_low) / 6
        self.roofs.append({
            "roof_id": f"R-{len(self.roofs) + 1:04d}", "parcel_id": parcel, "kind": "pitched" if pitch else "flat",
            "height_m": round(float(height[mask].max()), 1), "material": centre.name,
            "albedo": round(float(np.clip(self.rng.normal(centre.albedo, spread), centre.albedo_low, centre.albedo_high)), 2),
            "shape": quad})

    def tree(self, x, y, radius_m, height_m):
        self.trees.append((x, y, radius_m, height_m))

    def scatter_trees(self, quad, per_ha, radius=(1.8, 4.0), height=(4, 12)):
        for _ in range(self.rng.poisson(per_ha * area(quad) / 1e4)):
            s, t = self.rng.uniform(0.05, 0.95, 2)
            x, y = part(quad, s, s, t, t)[0]
            self.tree(x, y, self.rng.uniform(*radius), self.rng.uniform(*height))

    def plant(self):
        """Puts every tree on the surface as an ellipsoid crown; roofs and water stay as they are."""
        for x, y, radius, height in self.trees:
            win = self.window([(x, y)], radius)
            away = np.hypot(self.x[win[1]][None, :] - x, self.y[win[0]][:, None] - y) / radius
            crown = (away <= 1) & ~np.isin(self.detail[win], ROOFS + (WATER,))
            top = self.ground[win] + height * (0.55 + 0.45 * np.sqrt(np.clip(1 - away**2, 0, 1)))
            self.surface[win] = np.where(crown, np.maximum(self.surface[win], top), self.surface[win])
            self.detail[win][crown] = TREES
