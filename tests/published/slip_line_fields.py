"""Bearing pressure on clay whose strength grows with depth, by the method of characteristics.

Written from the equations of plasticity, without the package: it makes the table that
`probsoil/ground/bearing_capacity.py` holds (run this file to print it) and the tests set the two
against each other. Weightless soil of strength c = 1 + k z under a footing whose edge is at x = 0 and
whose base lies at x < 0; for a circle the axis is at x = -1 and the hoop stress equals the minor principal
stress (Haar and von Karman). With p the mean of the principal stresses in the plane and psi the
inclination of the major one to the vertical, along dx/dz = tan(psi -+ pi/4),

    dp -+ (2 c dpsi + k dx) = -(c/r) [(1 - cos 2 psi) dx + sin 2 psi dz]     (right side: circle only)

The field starts from the free surface beside the footing and a fan at its edge. Below a smooth base
psi = 0. Below a rough base psi = -pi/4 (full shear) from the edge up to where a rigid wedge or cone
begins, which the characteristic that ends at the centre bounds; if the whole base is within the rigid
wedge the fan ends earlier. The stress field was not extended into the wedge, so the rough values are not
proved exact here.
"""

import numpy as np
from numba import njit

AXIS = 5e-4  # fields of a circle end this close to the axis, as a share of the radius


@njit(cache=True)
def crossing(a, b, k, curved):
    """Return the point where the characteristics from two known points meet: x, z, p, psi."""
    x, z, psi, p = 0.5 * (a[0] + b[0]), 0.5 * (a[1] + b[1]), 0.5 * (a[3] + b[3]), 0.0
    for _ in range(200):
        mean_a, mean_b = 0.5 * (a[3] + psi), 0.5 * (b[3] + psi)
        turn_a, turn_b = mean_a - 0.25 * np.pi, mean_b + 0.25 * np.pi
        rest = -np.sin(turn_a) * np.cos(turn_b) + np.sin(turn_b) * np.cos(turn_a)
        step = ((b[1] - a[1]) * np.sin(turn_b) - (b[0] - a[0]) * np.cos(turn_b)) / rest
        x_new, z_new = a[0] + step * np.sin(turn_a), a[1] + step * np.cos(turn_a)
        c_a, c_b = 1.0 + 0.5 * k * (a[1] + z_new), 1.0 + 0.5 * k * (b[1] + z_new)
        hoop_a = hoop(a, x_new, z_new, mean_a, c_a, curved)
        hoop_b = hoop(b, x_new, z_new, mean_b, c_b, curved)
        rise = b[2] - a[2] + 2.0 * c_a * a[3] + 2.0 * c_b * b[3] - k * (2.0 * x_new - a[0] - b[0])
        psi_new = (rise - hoop_a + hoop_b) / (2.0 * c_a + 2.0 * c_b)
        p = a[2] + 2.0 * c_a * (psi_new - a[3]) + k * (x_new - a[0]) + hoop_a
        moved = abs(x_new - x) + abs(z_new - z) + abs(psi_new - psi)
        x, z, psi = x_new, z_new, psi_new
        if moved < 1e-13:
            break
    return x, z, p, psi


@njit(cache=True)
def hoop(start, x, z, psi, c, curved):
    """Return the part of a change of p that the hoop stress of a circle makes."""
    if not curved:
        return 0.0
    radius = 1.0 + 0.5 * (start[0] + x)
    return -c / radius * ((1.0 - np.cos(2.0 * psi)) * (x - start[0]) + np.sin(2.0 * psi) * (z - start[1]))


@njit(cache=True)
def field(surface, fan, end, k, curved, with_base):  # noqa: PLR0915 - one compiled sweep
    """Return points (line, family, 4), base points (line, 2) and how many families the base began.

    Family 0 to `fan` started in the fan, the next at the base, the last at the surface.
    """
    n = surface.size
    wide = fan + 1 + 2 * n + 2
    point = np.full((n + 1, wide, 4), np.nan)
    base = np.full((n + 1, 2), np.nan)
    for j in range(fan + 1):
        psi = 0.5 * np.pi + (end - 0.5 * np.pi) * j / fan
        point[0, j, 0], point[0, j, 1], point[0, j, 2], point[0, j, 3] = (
            0.0,
            0.0,
            1.0 + np.pi - 2.0 * psi,
            psi,
        )
    base[0, 0], base[0, 1] = 0.0, point[0, fan, 2]
    order, count, begun, growing = np.arange(wide), fan + 1, fan + 1, with_base
    for i in range(n):
        here, last = i + 1, wide - 1 - i
        point[here, last, 0], point[here, last, 1] = surface[i], 0.0
        point[here, last, 2], point[here, last, 3] = 1.0, 0.5 * np.pi
        fresh = np.empty(wide, np.int64)
        fresh[0] = last
        for j in range(count):
            family = order[j]
            x, z, p, psi = crossing(point[i, family], point[here, last], k, curved)
            point[here, family, 0], point[here, family, 1] = x, z
            point[here, family, 2], point[here, family, 3] = p, psi
            last, fresh[j + 1] = family, family
            if curved and 1.0 + x < AXIS:
                count, growing = j, False
                break
        count += 1
        if growing:
            b = point[here, last]
            turn = 0.5 * (b[3] + end) + 0.25 * np.pi
            x = b[0] - b[1] / np.cos(turn) * np.sin(turn)
            c = 1.0 + 0.5 * k * b[1]
            p = b[2] - 2.0 * c * (end - b[3]) - k * (x - b[0])
            p += hoop(b, x, 0.0, 0.5 * (b[3] + end), c, curved)
            growing = not curved or 1.0 + x > AXIS
            if growing:
                point[here, begun, 0], point[here, begun, 1] = x, 0.0
                point[here, begun, 2], point[here, begun, 3] = p, end
                base[here, 0], base[here, 1] = x, p
                fresh[count], begun, count = begun, begun + 1, count + 1
        order[:count] = fresh[:count]
        if count <= 1:
            break
    return point, base, begun - fan - 1


def surface_points(first, growth, longest, end):
    """Return points of the free surface, closer together near the edge."""
    points = [first]
    while points[-1] < end:
        points.append(points[-1] + min(longest, max(first, growth * points[-1])))
    return np.array(points)


def force_on_base(base, curved):
    """Return the cumulative integral of the second column over the base, per radian of a circle."""
    arm = 1.0 + 0.5 * (base[1:, 0] + base[:-1, 0]) if curved else 1.0
    return np.append(0.0, np.cumsum(arm * 0.5 * (base[1:, 1] + base[:-1, 1]) * -np.diff(base[:, 0])))


def wedge(point, base, family, born, k, curved):
    """Return where the wedge bounded by one family meets the centre, and the force on wedge and base.

    For a circle that its family leaves before psi = 0, the place is how far psi is off, beyond the axis.
    """
    track = point[born:, family]
    gone = np.isnan(track[:, 0])
    track = track[: int(gone.argmax())] if gone.any() else track
    turned = np.flatnonzero(track[:, 3] >= 0.0)
    if turned.size and turned[0] > 0:
        j = int(turned[0])
        share = -track[j - 1, 3] / (track[j, 3] - track[j - 1, 3])
        track = np.vstack([track[:j], track[j - 1] + share * (track[j] - track[j - 1])])
        place = float(track[-1, 0])
    elif curved and track.shape[0] > 2:
        track = track[1.0 + track[:, 0] > AXIS]
        place = -1.0 + float(track[-1, 3])
    else:
        return np.nan, np.nan
    step, mean = np.abs(np.diff(track, axis=0)), 0.5 * (track[1:] + track[:-1])
    arm = 1.0 + mean[:, 0] if curved else 1.0
    force = np.sum(arm * (mean[:, 2] * step[:, 0] + (1.0 + k * mean[:, 1]) * step[:, 1]))
    return place, float(force + force_on_base(base[: born + 1], curved)[-1])


def strip_pressure(ratios, *, rough, fine=1.0):
    """Return the mean pressure over c0 below strips of given ratios rho B/c0."""
    growth, fan = 0.02 / fine, int(80 * fine)
    surface = surface_points(growth, growth, np.inf, 1.6 * max(ratios) + 2.0)
    if not rough:
        point, base, _ = field(surface, fan, 0.0, 1.0, False, True)
        base[:, 1] += 1.0
        half = -base[1:, 0]
        return np.interp(ratios, 2.0 * half, force_on_base(base, False)[1:] / half)
    near = surface_points(0.2 * growth, growth, np.inf, 4.0)
    found = []
    for end in -0.25 * np.pi * np.linspace(0.01, 1.0, int(40 * fine)):
        point, base, _ = field(near, fan, end, 1.0, False, False)
        found.append(wedge(point, base, fan, 0, 1.0, False))
    point, base, number = field(surface, fan, -0.25 * np.pi, 1.0, False, True)
    found += [wedge(point, base, fan + i, i, 1.0, False) for i in range(1, number)]
    table = np.array([(-x, force / -x) for x, force in found if not np.isnan(x)])
    table = table[table[:, 0].argsort()]
    return np.interp(ratios, 2.0 * table[:, 0], table[:, 1])


def circle_pressure(ratio, *, rough, fine=1.0):
    """Return the mean pressure over c0 below a circle of a given ratio rho D/c0."""
    k, fan = 0.5 * ratio, int(60 * fine)
    first = min(0.01, 0.05 / max(k, 1e-9)) / fine
    surface = surface_points(first, 0.03 / fine, 0.01 / fine, 3.0)
    if not rough:
        _, base, number = field(surface, fan, 0.0, k, True, True)
        base = np.vstack([base[: number + 1], [-1.0, base[number, 1]]])  # the last of it up to the axis
        base[:, 1] += 1.0
        return 2.0 * float(force_on_base(base, True)[-1])

    def cone(end):
        point, base, _ = field(surface, fan, end, k, True, False)
        return wedge(point, base, fan, 0, k, True)

    # past the end sought the characteristics cross before the axis, so it is approached from one side
    ends = -0.25 * np.pi * np.linspace(0.05, 1.0, 20)
    short = [cone(end)[0] > -1.0 for end in ends]
    if not all(short):
        first = short.index(False)
        good, bad = ends[first - 1], ends[first]
        for _ in range(20):
            middle = 0.5 * (good + bad)
            good, bad = (middle, bad) if cone(middle)[0] > -1.0 else (good, middle)
        return 2.0 * cone(good)[1]
    point, base, number = field(surface, fan, -0.25 * np.pi, k, True, True)
    found = np.array([wedge(point, base, fan + i, i, k, True) for i in range(1, number)])
    inside = found[
        (found[:, 0] > -1.0) & (np.arange(len(found)) < np.append(found[:, 0] <= -1.0, True).argmax())
    ]
    # the ring between the end of the wedge and the axis is small: its force grows with its square
    inside = inside[np.isfinite(inside[:, 0])]
    gap, force = (1.0 + inside[-3:, 0]) ** 2, 2.0 * inside[-3:, 1]
    return float(np.polyfit(gap, force, 1)[1])


RATIOS = (
    0.0,
    0.25,
    0.5,
    1.0,
    2.0,
    3.0,
    4.0,
    6.0,
    8.0,
    10.0,
    12.0,
    16.0,
    20.0,
    30.0,
    40.0,
    60.0,
    100.0,
    300.0,
    1000.0,
)


def table(fine=2.0, ratios=RATIOS):
    """Yield ratio, factor of a smooth and a rough strip, shape factor of a smooth and a rough circle."""
    wanted = np.maximum(ratios, 1e-3)
    strips = [strip_pressure(wanted, rough=rough, fine=fine) for rough in (False, True)]
    for i, ratio in enumerate(ratios):
        circles = [circle_pressure(ratio, rough=rough, fine=fine) for rough in (False, True)]
        one = 2.0 + np.pi + 0.25 * ratio
        exact = [2.0 + np.pi if ratio == 0.0 else strip[i] for strip in strips]
        yield ratio, *(e / one for e in exact), *(c / e for c, e in zip(circles, exact, strict=True))


if __name__ == "__main__":
    import sys

    for row in table(float(sys.argv[1]) if len(sys.argv) > 1 else 2.0):
        sys.stdout.write("({:g}, {:.4f}, {:.4f}, {:.4f}, {:.4f}),\n".format(*row))
