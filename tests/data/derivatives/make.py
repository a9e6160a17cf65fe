#!/usr/bin/env python3
"""Reference discharges and first partial derivatives of structure equations.

Writes derivatives.json beside this file. Needs Python 3.9 or later and mpmath:

    python3 tests/data/derivatives/make.py

Everything is computed with 50 significant digits from the very numbers that a
reader of 64-bit floats gets from the file. Discharge and derivatives are found
in two ways that share only the published constants:

  (a) closed form: table segments by search, the total head as the trigonometric
      root of its cubic, derivatives by the chain rule and the implicit-function
      theorem, written by hand;
  (b) numerical: tables as sums of hat functions, the total head by Newton's
      iteration on its equation, derivatives by central differences of the whole
      calculation (mpmath.diff, which doubles the working precision).

The script stops if they differ anywhere by more than the tolerances below.
The file holds (a), rounded to the nearest 64-bit float, in SI units.

Equations and their published sources
  thin-plate-rectangular     Kindsvater and Carter 1957; ISO 1438:
      Q = F Ce (2/3) sqrt(2g) (b + kb + db) (h + 0.001 + dh)^1.5,
      Ce = a(b/B) + c(b/B) h/p; a, c, kb linear between nodes of b/B.
      Full width: b/B is 1 identically.
  thin-plate-triangular      Kindsvater-Shen, ISO 1438:
      Q = F Ce (8/15) sqrt(2g) tan(angle/2) (h + kh + dh)^2.5.
      Fully contracted: Ce, kh linear in the angle.
      Partially contracted, 90 degrees: Ce bilinear in p/B and h/p, digitised
      from NBS Special Publication 421 (Kulin and Compton 1975), figure 4-5;
      kh constant. The angle within 1 degree of 90 still enters tan(angle/2).
  rectangular-throated-flume ISO 4359:
      Q = F (2/3)^1.5 sqrt(g) Cd b H^1.5,
      Cd = (1 - 0.006 L/b) (1 - 0.003 L/h)^1.5.
  triangular-profile         ISO 4360, modular flow:
      Q = F (2/3)^1.5 sqrt(g) Cd b H^1.5, Cd = 1.163 (1 - 0.0003/h)^1.5.
  Both of the last:
      H = h + alpha Q^2 / (2 g A^2), A = B (h + p), smallest root above h.
Ratios h/p and b/B are those of the inputs, without dh and db. F is the
coefficient factor, dh and db the head and width adjustments.

Which constants are from memory (marked [M] in the project's collection of
equations: confirm them against your copy of the standard)
  - a and c at every b/B but 0.5 and 1.0;
  - all nodes of kb (thin-plate-rectangular);
  - Ce of the fully contracted notch; at 90 degrees the chart agrees;
  - 0.006, 0.003 and the exponent 1.5 of Cd (rectangular-throated-flume);
  - 1.163 and 0.0003 m (triangular-profile), with (2/3)^1.5 * 1.163 = 0.633 as
    a check.
The head adjustments 1 mm (rectangular) and kh (triangular; figure 4-3 of NBS
SP 421 rounded to 0.05 mm), the partially contracted Ce, and a and c at 0.5 and
1.0 were seen in published sources. For a at b/B 0.2, 0.7, 0.8 and 0.9 another
set of nodes, 0.001 away, is in circulation; the values here are the project's.
"""

import bisect
import pathlib
from functools import partial

from mpmath import mp, mpf

mp.dps = 50

POINTS_PER_CASE = 20
DERIVATIVE_TOLERANCE = mpf("1e-30")  # between (a) and (b), relative
ZERO_TOLERANCE = mpf("1e-40")  # the same, relative to Q/|input|, for derivatives that vanish
CLEAR_OF_NODES = 1e-3  # no point lies closer than this to a node or a branch, relative
NEAREST_CRITICAL_APPROACH = 0.9  # largest sqrt(alpha) F Cd b h / A; at 1 there is no root


def exact(*texts):
    return [mpf(text) for text in texts]


def row(text):
    return [None if cell == "-" else mpf(cell) for cell in text.split()]


# Published constants ---------------------------------------------------------

AC_NODES = exact("0", "0.2", "0.4", "0.5", "0.6", "0.7", "0.8", "0.9", "1")
A_VALUES = exact("0.587", "0.589", "0.591", "0.592", "0.593", "0.595", "0.597", "0.599", "0.602")
C_VALUES = exact("-0.0023", "-0.0018", "0.0058", "0.011", "0.018", "0.030", "0.045", "0.064", "0.075")
KB_NODES = exact("0", "0.2", "0.4", "0.6", "0.8", "1")
KB_VALUES = exact("0.0024", "0.0024", "0.0027", "0.0036", "0.0042", "-0.0009")
KH_RECTANGULAR = mpf("0.001")

ANGLE_NODES = [degrees * mp.pi / 180 for degrees in range(20, 101, 10)]
NOTCH_CE = exact("0.592", "0.586", "0.581", "0.579", "0.577", "0.5765", "0.577", "0.5785", "0.581")
NOTCH_KH = exact(
    "0.0028", "0.0021", "0.00165", "0.00135", "0.00115", "0.001", "0.0009", "0.00085", "0.00085"
)

PARTIAL_KH = mpf("0.00085")
PARTIAL_PB = exact("0.1", "0.2", "0.3", "0.4", "0.6", "0.8", "1")
PARTIAL_HP = exact("0.1", "0.2", "0.3", "0.35", "0.4", "0.5", "0.6", "0.7", "0.8", "0.9", "1", "1.1")
PARTIAL_CE = [  # a row for each p/B; -: beyond the published curve
    row("0.578 0.5785 0.579 0.579 0.579 0.579 0.5785 0.578 0.5775 0.5775 0.577 0.5765"),
    row("0.578 0.5785 0.579 0.579 0.579 0.579 0.5785 0.5785 0.5785 0.5795 0.5805 0.5815"),
    row("0.578 0.5785 0.579 0.579 0.579 0.579 0.5795 0.5805 0.5825 0.585 0.5875 0.5905"),
    row("0.578 0.5785 0.579 0.579 0.579 0.579 0.581 0.5845 0.5885 0.5935 0.599 -"),
    row("0.578 0.5785 0.579 0.5795 0.5805 0.584 0.5895 - - - - -"),
    row("0.578 0.5785 0.5795 0.5815 0.5845 0.5925 - - - - - -"),
    row("0.578 0.5785 0.5815 0.585 0.5905 - - - - - - -"),
]

FLUME_WIDTH_LOSS = mpf("0.006")
FLUME_HEAD_LOSS = mpf("0.003")
PROFILE_COEFFICIENT = mpf("1.163")
PROFILE_HEAD_LOSS = mpf("0.0003")


# (a) Closed form, derivatives by hand ----------------------------------------


def segment(nodes, x):
    """Index of the segment that holds x, which must lie inside the table."""
    assert nodes[0] < x < nodes[-1], "outside the table"
    return bisect.bisect_right(nodes, x) - 1


def line(nodes, values, x):
    """Value and slope of a table at x."""
    i = segment(nodes, x)
    slope = (values[i + 1] - values[i]) / (nodes[i + 1] - nodes[i])
    return values[i] + slope * (x - nodes[i]), slope


def patch(x, y):
    """Partially contracted Ce and its slopes at x = p/B, y = h/p."""
    i, j = segment(PARTIAL_PB, x), segment(PARTIAL_HP, y)
    dx, dy = PARTIAL_PB[i + 1] - PARTIAL_PB[i], PARTIAL_HP[j + 1] - PARTIAL_HP[j]
    s, t = (x - PARTIAL_PB[i]) / dx, (y - PARTIAL_HP[j]) / dy
    (low_left, low_right), (high_left, high_right) = (cells[j : j + 2] for cells in PARTIAL_CE[i : i + 2])
    value = (1 - s) * ((1 - t) * low_left + t * low_right) + s * ((1 - t) * high_left + t * high_right)
    by_x = ((1 - t) * (high_left - low_left) + t * (high_right - low_right)) / dx
    by_y = ((1 - s) * (low_right - low_left) + s * (high_right - high_left)) / dy
    return value, by_x, by_y


def rectangular_by_hand(x):
    full_width = "approach_width" not in x
    h, b, p, g = x["head"], x["crest_width"], x["crest_height"], x["gravity"]
    factor = x["coefficient_factor"]
    if full_width:
        a, c, kb = A_VALUES[-1], C_VALUES[-1], KB_VALUES[-1]
        a_slope = c_slope = kb_slope = mpf(0)
    else:
        wide = x["approach_width"]
        a, a_slope = line(AC_NODES, A_VALUES, b / wide)
        c, c_slope = line(AC_NODES, C_VALUES, b / wide)
        kb, kb_slope = line(KB_NODES, KB_VALUES, b / wide)
    ce = a + c * h / p
    ce_slope = a_slope + c_slope * h / p
    width = b + kb + x["width_adjustment"]
    head = h + KH_RECTANGULAR + x["head_adjustment"]
    q = factor * ce * mpf(2) / 3 * mp.sqrt(2 * g) * width * head * mp.sqrt(head)
    log = {  # derivatives of ln Q
        "head": c / p / ce + mpf(3) / 2 / head,
        "crest_width": 1 / width,
        "crest_height": -c * h / p**2 / ce,
        "coefficient_factor": 1 / factor,
        "head_adjustment": mpf(3) / 2 / head,
        "width_adjustment": 1 / width,
        "gravity": 1 / (2 * g),
    }
    if not full_width:
        by_ratio = ce_slope / ce + kb_slope / width
        log["crest_width"] += by_ratio / wide
        log["approach_width"] = -by_ratio * b / wide**2
    return q, {}, {key: q * log[key] for key in x}


def triangular_by_hand(x, contraction):
    h, p, wide, g = x["head"], x["crest_height"], x["approach_width"], x["gravity"]
    angle, factor = x["notch_angle"], x["coefficient_factor"]
    log = {key: mpf(0) for key in x}
    if contraction == "partial":
        ce, by_pb, by_hp = patch(p / wide, h / p)
        kh = PARTIAL_KH
    else:
        ce, ce_slope = line(ANGLE_NODES, NOTCH_CE, angle)
        kh, kh_slope = line(ANGLE_NODES, NOTCH_KH, angle)
    head = h + kh + x["head_adjustment"]
    q = factor * ce * mpf(8) / 15 * mp.sqrt(2 * g) * mp.tan(angle / 2) * head**2 * mp.sqrt(head)
    log["head"] = log["head_adjustment"] = mpf(5) / 2 / head
    log["notch_angle"] = 1 / mp.sin(angle)
    log["coefficient_factor"] = 1 / factor
    log["gravity"] = 1 / (2 * g)
    if contraction == "partial":
        log["head"] += by_hp / p / ce
        log["crest_height"] = (by_pb / wide - by_hp * h / p**2) / ce
        log["approach_width"] = -by_pb * p / wide**2 / ce
    else:
        log["notch_angle"] += ce_slope / ce + mpf(5) / 2 * kh_slope / head
    return q, {}, {key: q * log[key] for key in x}


def total_head_by_hand(x, width, bed, cd, log_cd):
    """Discharge, H and derivatives of Q = F (2/3)^1.5 sqrt(g) Cd b H^1.5.

    width and bed name the inputs b and p; log_cd holds derivatives of ln Cd.
    With Q = K H^1.5 the total head is a root of the cubic H = h + r H^3,
    r = alpha K^2 / (2 g A^2).
    """
    h, b, p, wide = x["head"], x[width], x[bed], x["approach_width"]
    g, alpha, factor = x["gravity"], x["kinetic_energy_coefficient"], x["coefficient_factor"]
    area = wide * (h + p)
    k = factor * mp.sqrt(mpf(8) / 27 * g) * cd * b
    r = alpha * k**2 / (2 * g * area**2)
    # H = 2 sin(theta) / sqrt(3 r) turns the cubic into sin(3 theta) = 3 h sqrt(3 r) / 2.
    total = 2 / mp.sqrt(3 * r) * mp.sin(mp.asin(3 * h * mp.sqrt(3 * r) / 2) / 3)
    q = k * total * mp.sqrt(total)

    log_k = {key: log_cd.get(key, mpf(0)) for key in x}
    log_k[width] += 1 / b
    log_k["coefficient_factor"] += 1 / factor
    log_k["gravity"] += 1 / (2 * g)
    log_area = {"head": 1 / (h + p), bed: 1 / (h + p), "approach_width": 1 / wide}
    log_alpha = {"kinetic_energy_coefficient": 1 / alpha}
    log_g = {"gravity": 1 / g}

    # G(H, x) = H - h - e = 0 with e = alpha K^2 H^3 / (2 g A^2), the velocity head.
    e = total - h
    by_total = 1 - 3 * e / total
    derivatives = {}
    for key in x:
        log_e = log_alpha.get(key, 0) + 2 * log_k[key] - log_g.get(key, 0) - 2 * log_area.get(key, 0)
        by_key = -(1 if key == "head" else 0) - e * log_e
        total_by_key = -by_key / by_total
        derivatives[key] = q * (log_k[key] + mpf(3) / 2 * total_by_key / total)
    return q, {"H": total}, derivatives


def flume_by_hand(x):
    h, b, length = x["head"], x["throat_width"], x["throat_length"]
    across = 1 - FLUME_WIDTH_LOSS * length / b
    along = 1 - FLUME_HEAD_LOSS * length / h
    cd = across * along * mp.sqrt(along)
    log_cd = {
        "head": mpf(3) / 2 * FLUME_HEAD_LOSS * length / h**2 / along,
        "throat_width": FLUME_WIDTH_LOSS * length / b**2 / across,
        "throat_length": -FLUME_WIDTH_LOSS / b / across - mpf(3) / 2 * FLUME_HEAD_LOSS / h / along,
    }
    return total_head_by_hand(x, "throat_width", "throat_invert_height", cd, log_cd)


def profile_by_hand(x):
    h = x["head"]
    left = 1 - PROFILE_HEAD_LOSS / h
    cd = PROFILE_COEFFICIENT * left * mp.sqrt(left)
    log_cd = {"head": mpf(3) / 2 * PROFILE_HEAD_LOSS / h**2 / left}
    return total_head_by_hand(x, "crest_width", "crest_height", cd, log_cd)


# (b) Numerical ---------------------------------------------------------------


def hats(nodes, x):
    """Weights of the nodes in the piecewise linear interpolation at x."""
    weights = []
    for i, node in enumerate(nodes):
        rise = (x - nodes[i - 1]) / (node - nodes[i - 1]) if i else mpf(1)
        fall = (nodes[i + 1] - x) / (nodes[i + 1] - node) if i + 1 < len(nodes) else mpf(1)
        weights.append(max(mpf(0), min(rise, fall)))
    return weights


def blend(weights, values):
    return mp.fsum(weight * value for weight, value in zip(weights, values) if weight)


def rectangular(x):
    b, h = x["crest_width"], x["head"]
    ratio = b / x["approach_width"] if "approach_width" in x else mpf(1)
    ac = hats(AC_NODES, ratio)
    ce = blend(ac, A_VALUES) + blend(ac, C_VALUES) * h / x["crest_height"]
    width = b + blend(hats(KB_NODES, ratio), KB_VALUES) + x["width_adjustment"]
    head = h + KH_RECTANGULAR + x["head_adjustment"]
    speed = (2 * x["gravity"]) ** mpf("0.5")
    return x["coefficient_factor"] * ce * mpf(2) / 3 * speed * width * head ** mpf("1.5")


def triangular(x, contraction):
    angle = x["notch_angle"]
    if contraction == "partial":
        across = hats(PARTIAL_PB, x["crest_height"] / x["approach_width"])
        along = hats(PARTIAL_HP, x["head"] / x["crest_height"])
        rows = [blend(along, cells) if weight else None for weight, cells in zip(across, PARTIAL_CE)]
        ce = blend(across, rows)
        kh = PARTIAL_KH
    else:
        weights = hats(ANGLE_NODES, angle)
        ce, kh = blend(weights, NOTCH_CE), blend(weights, NOTCH_KH)
    head = x["head"] + kh + x["head_adjustment"]
    speed = (2 * x["gravity"]) ** mpf("0.5")
    return x["coefficient_factor"] * ce * mpf(8) / 15 * speed * mp.tan(angle / 2) * head ** mpf("2.5")


def flume(x):
    return with_total_head(x, x["throat_width"], x["throat_invert_height"], flume_coefficient(x))


def flume_coefficient(x):
    length = x["throat_length"]
    across = 1 - FLUME_WIDTH_LOSS * length / x["throat_width"]
    return across * (1 - FLUME_HEAD_LOSS * length / x["head"]) ** mpf("1.5")


def profile(x):
    return with_total_head(x, x["crest_width"], x["crest_height"], profile_coefficient(x))


def profile_coefficient(x):
    return PROFILE_COEFFICIENT * (1 - PROFILE_HEAD_LOSS / x["head"]) ** mpf("1.5")


def with_total_head(x, b, p, cd):
    h, g, alpha = x["head"], x["gravity"], x["kinetic_energy_coefficient"]
    area = x["approach_width"] * (h + p)

    def discharge(total):
        return x["coefficient_factor"] * (mpf(2) / 3) ** mpf("1.5") * mp.sqrt(g) * cd * b * total ** mpf("1.5")

    def excess(total):
        return total - h - alpha * discharge(total) ** 2 / (2 * g * area**2)

    def slope(total):
        return 1 - 3 * alpha * discharge(total) ** 2 / (2 * g * area**2) / total

    # excess is concave, so from h Newton's iteration climbs to the smallest root.
    total = mp.findroot(excess, h, solver="newton", df=slope, tol=mp.eps * 16, maxsteps=200)
    assert total > h and slope(total) > 0, "not the smallest root above h"
    return discharge(total)


# Points ----------------------------------------------------------------------


class Spread:
    """Irregular, evenly spread numbers: multiples of square roots of primes, modulo 1."""

    PRIMES = [2, 3, 5, 7, 11, 13, 17, 19, 23, 29, 31]

    def __init__(self, case, trial):
        self.trial = trial * 1.0 + case * 1000.0
        self.column = 0

    def part(self):
        root = mp.sqrt(self.PRIMES[self.column])
        self.column += 1
        return float(mp.frac(self.trial * root))

    def even(self, low, high):
        return low + (high - low) * self.part()

    def layer(self, n, low, high):
        """The same within the n-th of equal layers, so that the points of a case fill the whole range."""
        step = (high - low) / POINTS_PER_CASE
        return self.even(low + n * step, low + (n + 1) * step)

    def geometric(self, low, high):
        return float(mpf(low) * (mpf(high) / mpf(low)) ** mpf(self.part()))


def short(value, digits=6):
    """The float nearest to value rounded to a few significant digits."""
    return float(f"{value:.{digits}g}")


def clear(x, nodes):
    return all(abs(x - node) > CLEAR_OF_NODES * node for node in map(float, nodes))


def gravity_of(n):
    """Standard gravity mostly, every fourth point another between equator and pole."""
    return short(9.7803 + 0.0025 * n, 7) if n % 4 == 3 else 9.80665


def factor_of(spread):
    return short(spread.even(0.95, 1.05), 5)


def adjustment_of(spread):
    return short(round(spread.even(-0.0005, 0.0005), 6))


def kinetic_of(n, spread):
    value = short(spread.even(1.0, 1.2), 5)
    return 1.0 if n % 5 == 0 else value


def contracted_point(n, s):
    ratio, wide = s.layer(n, 0.1, 0.97), s.geometric(0.7, 9.0)
    h, hp = s.geometric(0.03, 1.5), s.geometric(0.06, 2.7)
    x = {
        "head": short(h),
        "crest_width": short(ratio * wide),
        "approach_width": short(wide),
        "crest_height": short(h / hp),
        "coefficient_factor": factor_of(s),
        "head_adjustment": adjustment_of(s),
        "width_adjustment": adjustment_of(s),
        "gravity": gravity_of(n),
    }
    ratio = x["crest_width"] / x["approach_width"]
    good = clear(ratio, AC_NODES + KB_NODES) and x["crest_width"] > 0.14 and 0.09 < x["crest_height"] < 4
    return x if good else None


def full_width_point(n, s):
    h, hp = s.geometric(0.03, 1.5), s.geometric(0.06, 2.7)
    x = {
        "head": short(h),
        "crest_width": short(s.geometric(0.14, 8.0)),
        "crest_height": short(h / hp),
        "coefficient_factor": factor_of(s),
        "head_adjustment": adjustment_of(s),
        "width_adjustment": adjustment_of(s),
        "gravity": gravity_of(n),
    }
    return x if 0.09 < x["crest_height"] < 4 else None


def is_fully_contracted(x):
    h, p, wide = x["head"], x["crest_height"], x["approach_width"]
    return h / p <= 0.4 and h / wide <= 0.2 and p >= 0.45 and wide >= 0.9


def fully_contracted_point(n, s):
    degrees = s.even(89.1, 90.9) if n % 10 == 4 else s.layer(n, 20.2, 99.8)
    near_90 = 88.9 < degrees < 91.1
    h = s.geometric(0.03, 0.42)
    x = {
        "head": short(h),
        "notch_angle": short(float(mp.radians(degrees)), 8),
        "crest_height": short(max(s.even(0.43, 0.7), h / s.even(0.08, 0.39 if near_90 else 0.43))),
        "approach_width": short(max(s.even(0.86, 1.4), h / s.even(0.04, 0.19 if near_90 else 0.21))),
        "coefficient_factor": factor_of(s),
        "head_adjustment": adjustment_of(s),
        "gravity": gravity_of(n),
    }
    # Near 90 degrees only points that nobody could take for partial contraction.
    good = is_fully_contracted(x) or not near_90
    return x if good and clear(degrees, [*range(20, 101, 10), 89, 91]) else None


def partially_contracted_point(n, s):
    degrees = s.even(89.1, 90.9)
    hp, pb, wide = s.even(0.1, 1.1), s.geometric(0.1, 1.0), s.geometric(0.56, 4.0)
    x = {
        "head": short(hp * pb * wide),
        "notch_angle": short(float(mp.radians(degrees)), 8),
        "crest_height": short(pb * wide),
        "approach_width": short(wide),
        "coefficient_factor": factor_of(s),
        "head_adjustment": adjustment_of(s),
        "gravity": gravity_of(n),
    }
    h, p = x["head"], x["crest_height"]
    hp, pb = h / p, p / x["approach_width"]
    good = clear(hp, PARTIAL_HP) and clear(pb, PARTIAL_PB) and clear(degrees, [89, 90, 91])
    good = good and 0.1 < hp < 1.1 and 0.1 < pb < 1.0 and not is_fully_contracted(x)
    good = good and 0.03 < h < 0.66 and p > 0.09 and hp * pb < 0.44
    if not good:
        return None
    i, j = segment(PARTIAL_PB, pb), segment(PARTIAL_HP, hp)
    return x if None not in PARTIAL_CE[i][j : j + 2] + PARTIAL_CE[i + 1][j : j + 2] else None


def approach_is_subcritical(x, b, p, cd):
    area = x["approach_width"] * (x["head"] + p)
    ratio = x["kinetic_energy_coefficient"] ** 0.5 * x["coefficient_factor"] * cd * b * x["head"] / area
    return ratio < NEAREST_CRITICAL_APPROACH


def flume_point(n, s):
    h = s.geometric(0.03, 1.5)
    b, length, narrowing = h / s.geometric(0.2, 3.2), h / s.geometric(0.08, 0.7), s.even(0.25, 0.97)
    p = s.geometric(0.02, 1.0) * h
    x = {
        "head": short(h),
        "throat_width": short(b),
        "throat_length": short(length),
        "throat_invert_height": 0.0 if n % 4 == 2 else short(p),
        "approach_width": short(b / narrowing),
        "coefficient_factor": factor_of(s),
        "gravity": gravity_of(n),
        "kinetic_energy_coefficient": kinetic_of(n, s),
    }
    good = 0.09 < x["throat_width"] < 5 and x["throat_length"] < 12
    cd = float(flume_coefficient(x))
    good = good and approach_is_subcritical(x, x["throat_width"], x["throat_invert_height"], cd)
    return x if good else None


def profile_point(n, s):
    h = s.geometric(0.03, 1.5)
    wide = s.geometric(0.3, 12.0)
    x = {
        "head": short(h),
        "crest_width": short(wide * s.even(0.5, 1.0)),
        "crest_height": short(h / s.layer(n, 0.2, 3.7)),
        "approach_width": short(wide),
        "coefficient_factor": factor_of(s),
        "gravity": gravity_of(n),
        "kinetic_energy_coefficient": kinetic_of(n, s),
    }
    if n % 4 == 1:
        x["crest_width"] = x["approach_width"]
    good = x["crest_height"] > 0.055 and x["crest_width"] > 1.9 * h
    cd = float(profile_coefficient(x))
    good = good and approach_is_subcritical(x, x["crest_width"], x["crest_height"], cd)
    return x if good else None


CASES = [  # kind, regime, points, (a), (b)
    ("thin-plate-rectangular", "contracted", contracted_point, rectangular_by_hand, rectangular),
    ("thin-plate-rectangular", "full width", full_width_point, rectangular_by_hand, rectangular),
    (
        "thin-plate-triangular",
        "fully contracted",
        fully_contracted_point,
        partial(triangular_by_hand, contraction="full"),
        partial(triangular, contraction="full"),
    ),
    (
        "thin-plate-triangular",
        "partially contracted",
        partially_contracted_point,
        partial(triangular_by_hand, contraction="partial"),
        partial(triangular, contraction="partial"),
    ),
    ("rectangular-throated-flume", "free", flume_point, flume_by_hand, flume),
    ("triangular-profile", "1:2/1:5", profile_point, profile_by_hand, profile),
]


# The file --------------------------------------------------------------------

SOURCE = (
    "Computed with 50 significant digits (mpmath) by make.py in this directory from the equations of "
    "ISO 1438 (Kindsvater and Carter 1957; Kindsvater-Shen; NBS SP 421 chart digitised), ISO 4359 and ISO 4360; "
    "derivatives by hand and by numerical differentiation, which agree. SI units: m, rad, m/s2, m3/s. "
    "Some constants are from memory: see make.py."
)


def compare(x, by_hand, numerical):
    """Both ways at one point; returns (a) after checking it against (b)."""
    q, unknowns, derivatives = by_hand(x)
    assert list(derivatives) == list(x)
    assert abs(numerical(x) / q - 1) < DERIVATIVE_TOLERANCE, ("discharge", x)
    for key, value in derivatives.items():
        other = mp.diff(lambda t: numerical({**x, key: t}), x[key])
        limit = DERIVATIVE_TOLERANCE * abs(value)
        if value == 0:
            limit = ZERO_TOLERANCE * q / abs(x[key])
        assert abs(other - value) <= limit, (key, x, value, other)
    return q, unknowns, derivatives


def number(value):
    """The nearest 64-bit float with 17 significant digits."""
    text = f"{float(value):.17g}"
    assert float(text) == float(value)
    return text if any(mark in text for mark in ".e") else text + ".0"


def table(values, form):
    return "{" + ", ".join(f'"{key}": {form(value)}' for key, value in values.items()) + "}"


def main():
    blocks = []
    for case, (kind, regime, point, by_hand, numerical) in enumerate(CASES):
        trial = found = 0
        while found < POINTS_PER_CASE:
            trial += 1
            inputs = point(found, Spread(case, trial))
            if inputs is None:
                continue
            found += 1
            x = {key: mpf(value) for key, value in inputs.items()}
            q, unknowns, derivatives = compare(x, by_hand, numerical)
            blocks.append(
                f'    {{"kind": "{kind}", "regime": "{regime}",\n'
                f'     "inputs": {table(inputs, repr)},\n'
                f'     "discharge": {number(q)}, "unknowns": {table(unknowns, number)},\n'
                f'     "derivatives": {table(derivatives, number)}}}'
            )
    text = f'{{\n  "source": "{SOURCE}",\n  "points": [\n' + ",\n".join(blocks) + "\n  ]\n}\n"
    pathlib.Path(__file__).with_name("derivatives.json").write_text(text, encoding="utf-8")


if __name__ == "__main__":
    main()
