#!/usr/bin/env python3
"""Reference discharges and first partial derivatives for the whole catalogue of structures.

Writes catalogue.json beside this file, and prints how many points there are of each kind and branch.
Needs Python 3.9 or later and mpmath; takes about half a minute:

    python3 tests/data/derivatives/catalogue.py

Numbers are computed with 50 significant digits from the very 64-bit floats that stand in the file.
Discharge: the equation itself, or for implicit ones the smallest root of

    H - h - alpha Q(H)^2 / (2 g A^2) = 0        H total head, h gauged head, A area of the approach
    Q - Q(T(Q)) = 0                             tailwater given by a table T of level against discharge

from a scan that begins at H = h (or Q = 0), refined by the secant method. Derivatives, two routes:

  (a) central differences of the whole calculation, roots included, at more than twice the precision;
  (b) for implicit equations, the implicit-function theorem with Q as the unknown (for throats of shaped
      section Q and the critical depth), its partial derivatives by differences of explicit expressions only.

The script stops if they differ by more than 1e-25, relative. The file holds (a), rounded to the nearest
64-bit float. At the nodes of tables there is a list of one-sided derivatives of its own.
Tables of thin plates are those of make.py in this directory.

Equations and their published sources
  thin-plate-rectangular         Kindsvater and Carter 1957; ISO 1438. See make.py; in an approach with sloping
                                 sides the mean width A / (h + p) stands for B
  thin-plate-triangular          Kindsvater-Shen, ISO 1438; NBS Special Publication 421 (Kulin and Compton 1975).
                                 See make.py; mean width likewise
  thin-plate-full-width          Rehbock 1929; ISO 1438. Drowned: ISO 1438 (2008 on); Villemonte 1947
  thin-plate-trapezoidal         Cipoletti; USBR Water Measurement Manual, section 7-12
  broad-crested-rectangular      ISO 3846
  broad-crested-round-nosed      ISO 4374
  broad-crested-v-shaped         ISO 8333; coefficient of Bos, Replogle and Clemmens 1984 in place of its table
  trapezoidal-profile            Fritz and Hager 1998, slopes 1:2, in place of the tables of ISO 4362
  triangular-profile             ISO 4360, drowned flow by tailwater and by crest tapping
  streamlined-triangular-profile ISO 9827; the coefficient is an input
  flat-v                         ISO 4377, drowned flow by crest tapping
  rectangular-, trapezoidal-, u-throated-flume
                                 ISO 4359; critical depth in the throat follows from critical-flow theory
  parshall-flume                 ISO 9826 (metric sizes), ASTM D1941 (inches and feet). Drowned: Parshall 1936
                                 as adopted in ISO 9826; Skogerboe and others 1967
  compound                       ISO 14139
  end-depth                      ISO 18481

Which constants are from memory (confirm them against your copy of the standard)
  Not seen, and nothing else agrees or disagrees:
  - thin-plate-full-width: the Villemonte factor
  - round-nosed and throated flumes: the form of the coefficient, 0.006, 0.003 and the exponent 1.5 (the second
    bracket, with its exponent, reproduces a textbook example)
  - V-shaped: 0.07 and 0.018; trapezoidal-profile: 0.43, 0.06 and 0.55
  - parshall-flume: modular limits of the metric sizes and of 6 in to 8 ft; constants of the Parshall 1936
    drowned flow (0.0746 is their conversion to SI)
  - what make.py names for the thin plates
  Not seen, but a limit, continuity or an independent figure agrees:
  - thin-plate-full-width: 0.602, 0.083, 1.2 mm; the ISO 1438 factor for drowned flow
  - broad-crested-rectangular: the whole table; beyond h/p 0.6 or h/L 1.4 it is a smooth continuation
  - triangular-profile: 1.163, 0.0003 m, the factors for drowned flow
  - flat-v: CD, k_h, the shape factor Z and the factor for drowned flow
  - parshall-flume: C and n but for 2.40 m; the constants of Skogerboe and others
  - end-depth: 1.66 and 1.69
Seen in published sources: 1.8589 of the trapezoidal plate (3.367 in feet), C and n of the 2.40 m flume, the
modular limits of the 1 in to 3 in and 10 ft to 50 ft flumes. Derived, and so exact: critical flow in throats of
any shape and both branches of the V-shaped weir.
"""

import pathlib
import random
import sys
from collections import Counter

from mpmath import mp, mpf

sys.dont_write_bytecode = True  # leaves nothing beside make.py

from make import (
    A_VALUES,
    AC_NODES,
    ANGLE_NODES,
    C_VALUES,
    FLUME_HEAD_LOSS,
    FLUME_WIDTH_LOSS,
    KB_NODES,
    KB_VALUES,
    KH_RECTANGULAR,
    NOTCH_CE,
    NOTCH_KH,
    PARTIAL_CE,
    PARTIAL_HP,
    PARTIAL_KH,
    PARTIAL_PB,
    PROFILE_COEFFICIENT,
    PROFILE_HEAD_LOSS,
    exact,
    number,
    row,
    short,
    table,
)

mp.dps = 50

TOLERANCE = mpf("1e-25")  # between (a) and (b), relative
VANISHED = mpf("1e-35")  # a derivative smaller than this times Q/|input| has to be exactly 0
CLEAR = mpf("1e-3")  # no point lies closer than this to a node or a branch, relative
LARGEST_FROUDE = 0.6  # of the approach
SMALLEST_SLOPE = 0.35  # of H - h - alpha Q(H)^2 / (2 g A^2) by H at the root; 0 where roots cease to exist
NODE_STEP = mpf("1e-9")  # for the rough one-sided check at nodes, relative
NODE_TOLERANCE = mpf("1e-6")


# Published constants ---------------------------------------------------------

BROAD_HL = exact(*(f"{i / 10:.1f}" for i in range(1, 17)))
BROAD_HP = BROAD_HL
BROAD_C = [  # a row for each h/p from 0.1 to 1.6, a column for each h/L from 0.1 to 1.6
    row("0.850 0.850 0.850 0.861 0.870 0.885 0.893 0.925 0.948 0.971 0.993 1.016 1.039 1.062 1.085 1.106"),
    row("0.855 0.855 0.855 0.864 0.874 0.888 0.907 0.930 0.954 0.977 1.001 1.026 1.050 1.074 1.096 1.120"),
    row("0.864 0.864 0.864 0.868 0.879 0.894 0.913 0.936 0.961 0.986 1.011 1.037 1.061 1.085 1.110 1.132"),
    row("0.873 0.873 0.873 0.874 0.885 0.901 0.920 0.945 0.969 0.995 1.021 1.047 1.072 1.097 1.122 1.144"),
    row("0.882 0.882 0.882 0.883 0.894 0.909 0.929 0.954 0.978 1.005 1.032 1.057 1.083 1.109 1.133 1.154"),
    row("0.892 0.892 0.892 0.894 0.904 0.920 0.941 0.964 0.990 1.016 1.043 1.067 1.094 1.120 1.143 1.164"),
    row("0.901 0.901 0.901 0.906 0.916 0.932 0.952 0.975 1.000 1.026 1.052 1.077 1.104 1.129 1.152 1.171"),
    row("0.911 0.911 0.912 0.916 0.926 0.942 0.962 0.985 1.010 1.036 1.062 1.086 1.112 1.136 1.158 1.176"),
    row("0.921 0.921 0.922 0.926 0.936 0.952 0.972 0.996 1.021 1.046 1.072 1.096 1.120 1.143 1.163 1.181"),
    row("0.929 0.929 0.931 0.936 0.946 0.962 0.982 1.006 1.031 1.056 1.081 1.106 1.128 1.150 1.169 1.187"),
    row("0.935 0.937 0.940 0.946 0.956 0.972 0.993 1.017 1.042 1.066 1.092 1.115 1.138 1.159 1.177 1.195"),
    row("0.941 0.944 0.949 0.956 0.966 0.982 1.004 1.028 1.053 1.077 1.103 1.126 1.148 1.168 1.186 1.204"),
    row("0.946 0.951 0.957 0.966 0.977 0.993 1.016 1.040 1.063 1.089 1.114 1.136 1.158 1.178 1.196 1.214"),
    row("0.953 0.959 0.967 0.975 0.986 1.005 1.028 1.050 1.075 1.101 1.124 1.147 1.168 1.187 1.206 1.224"),
    row("0.961 0.968 0.975 0.984 0.997 1.018 1.040 1.061 1.086 1.111 1.134 1.155 1.176 1.196 1.215 1.235"),
    row("0.972 0.978 0.985 0.994 1.010 1.030 1.050 1.073 1.096 1.119 1.142 1.164 1.184 1.204 1.224 1.245"),
]

FLAT_N = exact("10", "20", "40")
FLAT_KH = exact("0.0008", "0.0005", "0.0004")
FLAT_CD = {
    "inside the V": exact("0.615", "0.620", "0.625"),
    "above the V": exact("0.620", "0.625", "0.630"),
}

PARSHALL = {  # C, n, range of h in m, modular limit, throat width in m where Parshall 1936 applies
    "0.152 m": ("0.381", "1.580", 0.03, 0.45, "0.6", None),
    "0.25 m": ("0.561", "1.513", 0.03, 0.60, "0.6", None),
    "0.30 m": ("0.679", "1.521", 0.03, 0.75, "0.6", "0.30"),
    "0.45 m": ("1.038", "1.537", 0.03, 0.75, "0.6", "0.45"),
    "0.60 m": ("1.403", "1.548", 0.05, 0.75, "0.6", "0.60"),
    "0.75 m": ("1.772", "1.557", 0.06, 0.75, "0.6", "0.75"),
    "0.90 m": ("2.147", "1.565", 0.06, 0.75, "0.6", "0.90"),
    "1.00 m": ("2.397", "1.569", 0.06, 0.80, "0.7", "1.00"),
    "1.20 m": ("2.904", "1.577", 0.06, 0.80, "0.7", "1.20"),
    "1.50 m": ("3.668", "1.586", 0.06, 0.80, "0.7", "1.50"),
    "1.80 m": ("4.440", "1.593", 0.08, 0.80, "0.7", "1.80"),
    "2.10 m": ("5.222", "1.599", 0.08, 0.80, "0.7", "2.10"),
    "2.40 m": ("6.004", "1.605", 0.08, 0.80, "0.7", "2.40"),
    "1 in": ("0.0604", "1.550", 0.015, 0.21, "0.5", None),
    "2 in": ("0.1207", "1.550", 0.015, 0.24, "0.5", None),
    "3 in": ("0.1765", "1.547", 0.03, 0.33, "0.5", None),
    "6 in": ("0.3812", "1.580", 0.03, 0.45, "0.6", None),
    "9 in": ("0.5354", "1.530", 0.03, 0.61, "0.6", None),
    "1 ft": ("0.6909", "1.522", 0.03, 0.76, "0.7", "0.3048"),
    "1.5 ft": ("1.0564", "1.538", 0.03, 0.76, "0.7", "0.4572"),
    "2 ft": ("1.4281", "1.550", 0.046, 0.76, "0.7", "0.6096"),
    "3 ft": ("2.1843", "1.566", 0.046, 0.76, "0.7", "0.9144"),
    "4 ft": ("2.9534", "1.578", 0.06, 0.76, "0.7", "1.2192"),
    "5 ft": ("3.7322", "1.587", 0.06, 0.76, "0.7", "1.5240"),
    "6 ft": ("4.5189", "1.595", 0.076, 0.76, "0.7", "1.8288"),
    "7 ft": ("5.3124", "1.601", 0.076, 0.76, "0.7", "2.1336"),
    "8 ft": ("6.1116", "1.607", 0.076, 0.76, "0.7", "2.4384"),
    "10 ft": ("7.463", "1.600", 0.09, 1.07, "0.8", None),
    "12 ft": ("8.859", "1.600", 0.09, 1.37, "0.8", None),
    "15 ft": ("10.96", "1.600", 0.09, 1.67, "0.8", None),
    "20 ft": ("14.45", "1.600", 0.09, 1.83, "0.8", None),
    "25 ft": ("17.94", "1.600", 0.09, 1.83, "0.8", None),
    "30 ft": ("21.44", "1.600", 0.09, 1.83, "0.8", None),
    "40 ft": ("28.43", "1.600", 0.09, 1.83, "0.8", None),
    "50 ft": ("35.41", "1.600", 0.09, 1.83, "0.8", None),
}
SKOGERBOE = {  # C1, n1, C2, n2, S_t, in feet
    "1 in": exact("0.299", "1.55", "0.0044", "1.000", "0.56"),
    "2 in": exact("0.612", "1.55", "0.0044", "1.000", "0.61"),
    "3 in": exact("0.915", "1.55", "0.0044", "1.000", "0.64"),
    "6 in": exact("1.66", "1.58", "0.0044", "1.080", "0.55"),
    "9 in": exact("2.51", "1.53", "0.0044", "1.060", "0.63"),
    "1 ft": exact("3.11", "1.52", "0.0044", "1.080", "0.62"),
    "2 ft": exact("5.94", "1.55", "0.0044", "1.140", "0.66"),
}

# c (a - S^k)^e for drowned flow
ISO_1438 = exact("1.007", "0.975", "1.45", "0.265")
VILLEMONTE = exact("1", "1", "1.5", "0.385")
PROFILE_TAPPING = exact("1.04", "0.945", "1.5", "0.256")
PROFILE_TAILWATER = exact("1.035", "0.817", "4", "0.0647")
FLAT_TAPPING = exact("1.078", "0.909", "1.5", "0.183")
BEND, BEND_CONSTANT, BEND_SLOPE, BEND_END = exact("0.93", "8.686", "8.403", "0.985")

REHBOCK = exact("0.602", "0.083", "0.0012")
CIPOLETTI = mpf("1.8589")
V_SHIFT, V_EXPONENT, V_LOW, V_HIGH = exact("0.07", "0.018", "0.1", "1")
FRITZ_HAGER = exact("0.43", "0.06", "0.55")
END_DEPTH = {"confined": mpf("1.66"), "unconfined": mpf("1.69")}
PARSHALL_1936 = exact("0.0746", "0.815", "0.3048", "1.8", "1.8", "2.45", "4.57", "3.14", "0.093")
FOOT = mpf("0.3048")


# Tables and branches, with a watch on how near they are ----------------------


class Outside(Exception):
    """The point cannot be used: a table is left, or there is no clear root."""


class Watch:
    """While on, notes every node and branch that an evaluation meets, and the branches taken."""

    seen = None
    taken = None
    side = None  # at a node, the segment to take: "below" or "above"


def met(value, *thresholds):
    if Watch.seen is not None:
        Watch.seen += [(value, mpf(threshold)) for threshold in thresholds]


def took(branch):
    if Watch.taken is not None and branch not in Watch.taken:
        Watch.taken.append(branch)


def at_most(value, threshold):
    met(value, threshold)
    return value <= threshold


def is_past(value, end):
    """Whether a curve's end is passed: allowed while roots are looked for, not at a point."""
    met(value, end)
    if Watch.seen is not None and value >= end:
        raise Outside
    return value >= end


def segment(nodes, x):
    met(x, *nodes)
    for i, node in enumerate(nodes):
        if Watch.side and abs(x - node) < mpf("1e-14") * node:
            return i if Watch.side == "above" else i - 1
    if not nodes[0] < x < nodes[-1]:
        raise Outside
    return max(i for i, node in enumerate(nodes) if node <= x)


def linear(nodes, values, x):
    i = segment(nodes, x)
    return values[i] + (values[i + 1] - values[i]) * ((x - nodes[i]) / (nodes[i + 1] - nodes[i]))


def bilinear(rows, columns, cells, y, x):
    i, j = segment(rows, y), segment(columns, x)
    corners = cells[i][j : j + 2] + cells[i + 1][j : j + 2]
    if None in corners:
        raise Outside
    s, t = (y - rows[i]) / (rows[i + 1] - rows[i]), (x - columns[j]) / (columns[j + 1] - columns[j])
    upper = corners[0] + t * (corners[1] - corners[0])
    lower = corners[2] + t * (corners[3] - corners[2])
    return upper + s * (lower - upper)


def power_factor(constants, s):
    """c (a - S^k)^e, or None where that is 1 or more; 0 beyond the end."""
    c, a, k, e = constants
    if is_past(s, a ** (1 / k)):
        return mpf(0)
    if at_most(s, 0) or at_most(s, (a - (1 / c) ** (1 / e)) ** (1 / k)):
        return None
    return c * (a - s**k) ** e


def drowned_factor(x, published, branch="drowned"):
    if published is None:
        took("modular")
        return mpf(1)
    took(branch)
    # The input moves the factor by no more than the reduction itself.
    moved = x["drowned_flow_factor"] - 1
    return published * (1 + max(min(moved, 1 - published), published - 1))


def drowned_rating(x, published, branch="drowned"):
    """Of a Parshall flume, whose published factor jumps where it begins: not above 1."""
    if published is None:
        took("modular")
        return mpf(1)
    took(branch)
    return min(mpf(1), x["drowned_flow_factor"] * published)


def root_of_cube(value):
    """value^1.5"""
    return value * mp.sqrt(value)


def ideal(g):
    """(2/3)^1.5 sqrt(g)"""
    return mp.sqrt(mpf(8) / 27 * g)


# Approach --------------------------------------------------------------------


def approach(x, bed="crest_height", width="approach_width"):
    """Area and surface width."""
    depth, slope = x["head"] + x[bed], x.get("approach_side_slope", mpf(0))
    return (x[width] + slope * depth) * depth, x[width] + 2 * slope * depth


def throat_approach(x):
    return approach(x, "throat_invert_height")


def trapezoidal_approach(x):
    return approach(x, "throat_invert_height", "approach_bottom_width")


# Discharge, given total head and tailwater -----------------------------------


def thin_plate_rectangular(x, total, tail, spec):
    b, h = x["crest_width"], x["head"]
    depth = h + x["crest_height"]
    ratio = b / (approach(x)[0] / depth)
    ce = linear(AC_NODES, A_VALUES, ratio) + linear(AC_NODES, C_VALUES, ratio) * h / x["crest_height"]
    width = b + linear(KB_NODES, KB_VALUES, ratio) + x["width_adjustment"]
    head = h + KH_RECTANGULAR + x["head_adjustment"]
    return x["coefficient_factor"] * ce * mpf(2) / 3 * mp.sqrt(2 * x["gravity"]) * width * root_of_cube(head)


def thin_plate_triangular(x, total, tail, spec):
    angle, h, p = x["notch_angle"], x["head"], x["crest_height"]
    if spec.regime == "partially contracted":
        mean_width = approach(x)[0] / (h + p)
        ce = bilinear(PARTIAL_PB, PARTIAL_HP, PARTIAL_CE, p / mean_width, h / p)
        kh = PARTIAL_KH
    else:
        ce, kh = linear(ANGLE_NODES, NOTCH_CE, angle), linear(ANGLE_NODES, NOTCH_KH, angle)
    head = h + kh + x["head_adjustment"]
    speed = mp.sqrt(2 * x["gravity"])
    return x["coefficient_factor"] * ce * mpf(8) / 15 * speed * mp.tan(angle / 2) * head * root_of_cube(head)


def rehbock(h, p, b, adjustment, factor, g):
    constant, slope, kh = REHBOCK
    ce = constant + slope * h / p
    return factor * ce * mpf(2) / 3 * mp.sqrt(2 * g) * b * root_of_cube(h + kh + adjustment)


def thin_plate_full_width(x, total, tail, spec):
    h = x["head"]
    q = rehbock(
        h, x["crest_height"], x["crest_width"], x["head_adjustment"], x["coefficient_factor"], x["gravity"]
    )
    if spec.drowned is None:
        return q
    constants = ISO_1438 if spec.drowned == "ISO 1438" else VILLEMONTE
    return drowned_factor(x, power_factor(constants, tail / h)) * q


def thin_plate_trapezoidal(x, total, tail, spec):
    return x["coefficient_factor"] * CIPOLETTI * x["crest_width"] * root_of_cube(x["head"])


def broad_crested_rectangular(x, total, tail, spec):
    h = x["head"]
    c = bilinear(BROAD_HP, BROAD_HL, BROAD_C, h / x["crest_height"], h / x["crest_length_along_flow"])
    return ideal(x["gravity"]) * x["coefficient_factor"] * c * x["crest_width"] * root_of_cube(h)


def broad_crested_round_nosed(x, total, tail, spec):
    b, loss = x["crest_width"], x["displacement_thickness_ratio"] * x["crest_length_along_flow"]
    cd = (1 - 2 * loss / b) * root_of_cube(1 - loss / x["head"])
    return ideal(x["gravity"]) * x["coefficient_factor"] * cd * b * root_of_cube(total)


def broad_crested_v_shaped(x, total, tail, spec):
    depth, slope = x["v_depth"], mp.tan(x["vertex_angle"] / 2)
    ratio = total / x["crest_length_along_flow"]
    met(ratio, V_LOW, V_HIGH)
    if not V_LOW < ratio < V_HIGH:
        raise Outside
    cd = (ratio - V_SHIFT) ** V_EXPONENT
    factor, g = x["coefficient_factor"], x["gravity"]
    if at_most(total, mpf(5) / 4 * depth):
        took("below 1.25 H_b")
        fall = mpf(4) / 5 * total
        return factor * cd * mp.sqrt(g / 2) * slope * fall * root_of_cube(fall)
    took("above 1.25 H_b")
    return factor * cd * ideal(g) * 2 * depth * slope * root_of_cube(total - depth / 2)


def trapezoidal_profile(x, total, tail, spec):
    middle, swing, shift = FRITZ_HAGER
    xi = total / (total + x["crest_length_along_flow"])
    cq = middle + swing * mp.sin(mp.pi * (xi - shift))
    return x["coefficient_factor"] * cq * x["crest_width"] * mp.sqrt(2 * x["gravity"]) * root_of_cube(total)


def profile_cd(h):
    return PROFILE_COEFFICIENT * root_of_cube(1 - PROFILE_HEAD_LOSS / h)


def triangular_profile(x, total, tail, spec):
    q = ideal(x["gravity"]) * x["coefficient_factor"] * profile_cd(x["head"]) * x["crest_width"]
    q *= root_of_cube(total)
    if spec.drowned is None:
        return q
    s = tail / total
    if spec.drowned == "crest tapping":
        return drowned_factor(x, power_factor(PROFILE_TAPPING, s)) * q
    if at_most(s, BEND):
        return drowned_factor(x, power_factor(PROFILE_TAILWATER, s), "branch 1") * q
    s = BEND_END if is_past(s, BEND_END) else s
    return drowned_factor(x, BEND_CONSTANT - BEND_SLOPE * s, "branch 2") * q


def streamlined_triangular_profile(x, total, tail, spec):
    factor = x["coefficient_factor"] * x["discharge_coefficient"]
    return ideal(x["gravity"]) * factor * x["crest_width"] * root_of_cube(total)


def flat_v(x, total, tail, spec):
    n = x["cross_slope"]
    v_height = x["crest_width"] / (2 * n)
    if at_most(x["head"], v_height) != (spec.regime == "inside the V"):
        raise Outside
    kh, cd = linear(FLAT_N, FLAT_KH, n), linear(FLAT_N, FLAT_CD[spec.regime], n)
    effective = total - kh
    z = mpf(1)
    if at_most(effective, v_height):
        took("H_e in the V")
    else:
        took("H_e above the V")
        rest = 1 - v_height / effective
        z -= rest * root_of_cube(rest)
    q = mpf(4) / 5 * mp.sqrt(x["gravity"]) * x["coefficient_factor"] * cd * n * z
    q *= effective * root_of_cube(effective)
    if spec.drowned is None:
        return q
    return drowned_factor(x, power_factor(FLAT_TAPPING, (tail - kh) / effective)) * q


def flume_cd(h, b, length, share=1):
    return (1 - FLUME_WIDTH_LOSS * share * length / b) * root_of_cube(1 - FLUME_HEAD_LOSS * length / h)


def rectangular_throated_flume(x, total, tail, spec):
    b = x["throat_width"]
    cd = flume_cd(x["head"], b, x["throat_length"])
    return ideal(x["gravity"]) * x["coefficient_factor"] * cd * b * root_of_cube(total)


def trapezoid_cd(x):
    m = x["side_slope"]
    return flume_cd(x["head"], x["throat_bottom_width"], x["throat_length"], mp.sqrt(1 + m**2) - m)


def trapezoid(x, y):
    b, m = x["throat_bottom_width"], x["side_slope"]
    return (b + m * y) * y, b + 2 * m * y


def circle_cd(x):
    return flume_cd(x["head"], x["throat_diameter"], x["throat_length"])


def u_section(x, y):
    d = x["throat_diameter"]
    if y <= d / 2:
        theta = 2 * mp.acos(1 - 2 * y / d)
        return d**2 / 8 * (theta - mp.sin(theta)), d * mp.sin(theta / 2)
    return mp.pi * d**2 / 8 + d * (y - d / 2), d


def critical_flow(x, cd, section):
    area, width = section
    return x["coefficient_factor"] * cd * area * mp.sqrt(x["gravity"] * area / width)


def trapezoid_depth(x, total):
    b, m = x["throat_bottom_width"], x["side_slope"]
    root = mp.sqrt(16 * m**2 * total**2 + 16 * m * b * total + 9 * b**2)
    return (4 * m * total - 3 * b + root) / (10 * m)


def u_depth(x, total):
    """Critical depth; below the springing by the angle, as H/D increases with it."""
    d = x["throat_diameter"]
    if not at_most(total, d / 2 + mp.pi * d / 16):
        took("above the springing")
        return mpf(2) / 3 * (total + d * (mpf(1) / 4 - mp.pi / 16))
    took("below the springing")

    def excess(theta):
        arc = (theta - mp.sin(theta)) / (16 * mp.sin(theta / 2))
        return (1 - mp.cos(theta / 2)) / 2 + arc - total / d

    with mp.workdps(15):
        low, high = mpf("1e-6"), +mp.pi
        for _ in range(36):
            middle = (low + high) / 2
            low, high = (middle, high) if excess(middle) < 0 else (low, middle)
        low, high = +low, +high
    theta = secant(excess, low, high)
    return d / 2 * (1 - mp.cos(theta / 2))


def trapezoidal_throated_flume(x, total, tail, spec):
    return critical_flow(x, trapezoid_cd(x), trapezoid(x, trapezoid_depth(x, total)))


def u_throated_flume(x, total, tail, spec):
    return critical_flow(x, circle_cd(x), u_section(x, u_depth(x, total)))


def parshall_flume(x, total, tail, spec):
    c, n, _, _, limit, b = PARSHALL[spec.choice]
    h = x["head"]
    free = mpf(c) * h ** mpf(n)
    q = x["coefficient_factor"] * free
    if spec.drowned is None:
        return q
    s, published = tail / h, None
    if is_past(s, mpf("0.98")):
        published = mpf(0)
    elif spec.drowned == "Parshall 1936":
        if not at_most(s, mpf(limit)):
            scale, power, foot, top, outer, less, base, slope, added = PARSHALL_1936
            bracket = h / (foot * ((top / s) ** outer - less))
            loss = scale * mpf(b) ** power * (bracket ** (base - slope * s) + added * s)
            published = 1 - loss / free
    else:
        c1, n1, c2, n2, limit = SKOGERBOE[spec.choice]
        if not at_most(s, limit):
            below = c1 * ((h - tail) / FOOT) ** n1 / (-(mp.log(s, 10) + c2)) ** n2
            published = below * FOOT**3 / free
    return drowned_rating(x, published) * q


def end_depth(x, total, tail, spec):
    c = END_DEPTH[spec.choice]
    return x["coefficient_factor"] * c * x["channel_width"] * mp.sqrt(x["gravity"]) * root_of_cube(x["head"])


def compound(x, total, tail, spec):
    g, q = x["gravity"], mpf(0)
    for i, kind in enumerate(spec.sections, 1):
        own = {key.split(" ", 2)[2]: value for key, value in x.items() if key.startswith(f"section {i} ")}
        level, factor = own["crest_level"], own["coefficient_factor"]
        h, energy = x["head"] - level, total - level
        if at_most(h, 0):
            took(f"section {i} dry")
            if energy > 0:  # water that only its velocity lifts above the crest: not defined
                raise Outside
        elif kind == "thin-plate-full-width":
            p = x["crest_height"] + level
            q += rehbock(h, p, own["crest_width"], own["head_adjustment"], factor, g)
        elif kind == "triangular-profile":
            q += ideal(g) * factor * profile_cd(h) * own["crest_width"] * root_of_cube(energy)
        else:
            b = own["throat_width"]
            q += ideal(g) * factor * flume_cd(h, b, own["throat_length"]) * b * root_of_cube(energy)
    return q


# Roots and derivatives -------------------------------------------------------


class Spec:
    """An equation in one of its forms."""

    def __init__(self, law, regime, choice=None, drowned=None, sections=None, area=None, critical=None):
        self.kind = law.__name__.replace("_", "-")
        self.law, self.regime, self.choice, self.drowned = law, regime, choice, drowned
        self.sections, self.area, self.critical = sections, area, critical
        self.tailwater = None  # discharges, levels, t_0

    def with_tailwater(self, discharges, levels, offset):
        spec = Spec(
            self.law, self.regime, self.choice, self.drowned, self.sections, self.area, self.critical
        )
        spec.tailwater = discharges, levels, offset
        return spec


def secant(function, first, second):
    return mp.findroot(function, (first, second), solver="secant", tol=mp.eps ** mpf("0.9"), maxsteps=60)


def energy(x, q, spec):
    """Total head at a discharge."""
    if spec.area is None:
        return None
    return x["head"] + x["kinetic_energy_coefficient"] * q**2 / (2 * x["gravity"] * spec.area(x)[0] ** 2)


def downstream(x, q, spec):
    if spec.tailwater is None:
        return x.get("tailwater_head")
    discharges, levels, offset = spec.tailwater
    return linear(discharges, levels, q) + (x["tailwater_head"] - offset)


def by_total(x, spec):
    """What has to vanish, as a function of the total head."""
    tail = x.get("tailwater_head")
    return lambda total: total - energy(x, spec.law(x, total, tail, spec), spec)


def by_discharge(x, spec):
    """What has to vanish, as a function of the discharge."""
    return lambda q: q - spec.law(x, energy(x, q, spec), downstream(x, q, spec), spec)


def is_implicit(spec):
    return spec.area is not None or spec.tailwater is not None


def first_root(function, low, high, cells=400, alone=False):
    """The smallest root above low, roughly; alone: there must be no other up to high."""
    with mp.workdps(20):
        step = (high - low) / cells
        points = [low + i * step for i in range(cells + 1)]
        below, found = points[0], None
        if function(below) >= 0:
            raise Outside
        for above in points[1:]:
            value = function(above)
            if found is None and value >= 0:
                found = (below, above)
                if not alone:
                    break
            elif found and value < 0:
                raise Outside
            below = above
        if found is None:
            raise Outside
        left, right = found
        for _ in range(50):
            middle = (left + right) / 2
            left, right = (middle, right) if function(middle) < 0 else (left, middle)
        if max(abs(function(left)), abs(function(right))) > mpf("1e-12") * right:
            raise Outside  # a jump, not a root
        return left, right


class Solver:
    """Solves near a root that was found once by a scan."""

    def __init__(self, x, spec):
        self.spec = spec
        self.start = None
        if spec.tailwater is not None:
            modular = {**x, "tailwater_head": mpf(-1)}
            top = spec.law(modular, energy(x, mpf(0), spec), mpf(-1), spec)
            self.start = first_root(by_discharge(x, spec), top / 1000, top * mpf("1.25"), alone=True)
        elif spec.area is not None:
            self.start = first_root(by_total(x, spec), x["head"], x["head"] * mpf("1.6"))
        if self.start is not None:
            self.start = self.unknown(x), None
            self.start = self.start[0], self.start[0] * (1 + mpf("1e-24"))

    def unknown(self, x):
        function = by_discharge if self.spec.tailwater is not None else by_total
        return secant(function(x, self.spec), *self.start)

    def __call__(self, x):
        spec = self.spec
        if spec.tailwater is not None:
            return self.unknown(x)
        total = None if spec.area is None else self.unknown(x)
        return spec.law(x, total, x.get("tailwater_head"), spec)


def residuals(x, unknowns, spec):
    """For route (b): what has to vanish, as explicit expressions in the inputs and the unknowns."""
    q = unknowns[0]
    if spec.critical is None:
        return [by_discharge(x, spec)(q)]
    y = unknowns[1]
    cd, section = spec.critical
    area, width = section(x, y)
    return [energy(x, q, spec) - y - area / (2 * width), q - critical_flow(x, cd(x), (area, width))]


def by_theorem(x, q, spec):
    unknowns = [q]
    if spec.critical is not None:
        depth = trapezoid_depth if spec.critical[1] is trapezoid else u_depth
        unknowns.append(depth(x, energy(x, q, spec)))
    size = len(unknowns)
    assert all(abs(value) < mpf("1e-45") * (1 + q) for value in residuals(x, unknowns, spec))

    def partials(vary, at):
        return [mp.diff(lambda t: residuals(*vary(t), spec)[i], at) for i in range(size)]

    matrix = mp.matrix(size, size)
    for j in range(size):
        column = partials(lambda t: (x, unknowns[:j] + [t] + unknowns[j + 1 :]), unknowns[j])
        for i in range(size):
            matrix[i, j] = column[i]
    result = {}
    for key in x:
        right = [-value for value in partials(lambda t: ({**x, key: t}, unknowns), x[key])]
        result[key] = mp.lu_solve(matrix, mp.matrix(right))[0] if any(right) else mpf(0)
    return result


def derivatives_of(x, spec, keys=None):
    """Discharge and derivatives by (a), after the comparison with (b)."""
    solver = Solver(x, spec)
    q = solver(x)
    result = {key: mp.diff(lambda t: solver({**x, key: t}), x[key]) for key in keys or x}
    other = by_theorem(x, q, spec) if is_implicit(spec) else result
    for key, value in result.items():
        scale = q / abs(x[key]) if x[key] else q
        assert value == 0 or abs(value) > VANISHED * scale, ("should vanish", spec.kind, key, value)
        assert abs(other[key] - value) <= TOLERANCE * abs(value), (spec.kind, key, value, other[key])
    return q, result


def examine(x, spec):
    """Branches taken at a point, or Outside if it is too near to something."""
    solver = Solver(x, spec)
    q = solver(x)
    Watch.seen, Watch.taken = [], []
    try:
        total = energy(x, q, spec)
        spec.law(x, total, downstream(x, q, spec), spec)
        seen, taken = Watch.seen, Watch.taken
    finally:
        Watch.seen = Watch.taken = None
    for value, threshold in seen:
        if abs(value - threshold) <= CLEAR * (abs(threshold) if threshold else x["head"]):
            raise Outside
    if spec.area is not None:
        area, width = spec.area(x)
        with mp.workdps(20):
            froude = q / (area * mp.sqrt(x["gravity"] * area / width))
            function = by_discharge(x, spec) if spec.tailwater is not None else by_total(x, spec)
            slope = mp.diff(function, q if spec.tailwater is not None else total)
        if froude > LARGEST_FROUDE or slope < SMALLEST_SLOPE:
            raise Outside
    return q, taken


# Points ----------------------------------------------------------------------


class Draw:
    def __init__(self, name):
        self.random = random.Random(name)

    def even(self, low, high):
        return self.random.uniform(low, high)

    def spread(self, low, high):
        """Evenly spread in the logarithm."""
        return low * (high / low) ** self.random.random()

    def adjustment(self):
        return short(round(self.random.uniform(-0.0005, 0.0005), 6))

    def one_of(self, *values):
        return self.random.choice(values)


def rounded(**values):
    return {key: short(value) for key, value in values.items()}


def complete(x, draw, spec, adjustments=(), tail=None):
    """Adds what many kinds have in common."""
    x["coefficient_factor"] = short(draw.even(0.95, 1.05))
    for name in adjustments:
        x[name] = draw.adjustment()
    x["gravity"] = short(draw.even(9.78, 9.83))
    if spec.area is not None:
        x["kinetic_energy_coefficient"] = short(draw.even(1.0, 1.2))
    if tail is not None:
        x["tailwater_head"] = short(tail)
        x["drowned_flow_factor"] = short(draw.even(0.95, 1.05))
    return x


def rectangular_point(d, spec):
    wide, h = d.spread(0.7, 6), d.spread(0.04, 0.9)
    p = h / d.spread(0.1, 2.3)
    slope = d.even(0.05, 1.5)
    mean = wide + slope * (h + p)
    x = rounded(head=h, crest_width=mean * d.even(0.15, 0.95), approach_width=wide)
    x |= rounded(approach_side_slope=slope, crest_height=p)
    if not (0.15 < x["crest_width"] < wide and p > 0.1):
        return None
    return complete(x, d, spec, ("head_adjustment", "width_adjustment"))


def notch_point(d, spec):
    hp, pb, wide, slope = d.even(0.1, 1.1), d.spread(0.1, 1.0), d.spread(0.5, 3.5), d.even(0.05, 1.5)
    p = pb * wide / (1 - min(0.9, slope * pb * (1 + hp)))
    mean = wide + slope * p * (1 + hp)
    h = hp * p
    x = rounded(head=h, notch_angle=float(mp.radians(d.even(89.1, 90.9))), crest_height=p)
    x |= rounded(approach_width=wide, approach_side_slope=slope)
    if not (0.06 < h < 0.6 and 0.1 < p < 2 and h / mean < 0.4 and mean > 0.6):
        return None
    if h / p <= 0.41 and h / mean <= 0.21 and p >= 0.44 and mean >= 0.88:  # fully contracted, or nearly
        return None
    return complete(x, d, spec, ("head_adjustment",))


def full_width_point(d, spec, ratio=None):
    h = d.spread(0.04, 0.75)
    x = rounded(head=h, crest_width=d.spread(0.3, 5), crest_height=h / d.spread(0.1, 2.3))
    tail = None if ratio is None else h * d.even(*ratio)
    return complete(x, d, spec, ("head_adjustment",), tail) if x["crest_height"] > 0.08 else None


def trapezoidal_plate_point(d, spec):
    h = d.spread(0.06, 0.6)
    b = h / d.spread(0.08, 0.48)
    x = rounded(head=h, crest_width=b, approach_width=b + h * d.even(4.2, 8))
    x["crest_height"] = short(max(0.3, h * d.even(2, 4)))
    x["approach_side_slope"] = short(d.one_of(0.0, d.even(0.1, 2)))
    return complete(x, d, spec)


def broad_point(d, spec):
    h = d.spread(0.06, 1.2)
    x = rounded(head=h, crest_width=d.spread(0.3, 6), crest_height=h / d.even(0.11, 1.59))
    x["crest_length_along_flow"] = short(h / d.even(0.11, 1.59))
    return complete(x, d, spec) if 0.15 < x["crest_height"] < 4 else None


def round_nosed_point(d, spec):
    h = d.spread(0.06, 1.2)
    b = h * d.even(1.3, 6)
    x = rounded(head=h, crest_width=b, crest_height=h / d.spread(0.15, 1.5))
    x["crest_length_along_flow"] = short(h / d.even(0.08, 0.5))
    x |= rounded(approach_width=b * d.even(1, 1.6), displacement_thickness_ratio=d.even(0.0025, 0.008))
    return complete(x, d, spec) if x["crest_height"] > 0.15 and b > x["crest_length_along_flow"] / 5 else None


def v_shaped_point(d, spec):
    h, angle = d.spread(0.07, 1.0), d.even(90, 150)
    depth = h / d.even(0.4, 2.4)
    b = 2 * depth * float(mp.tan(mp.radians(angle) / 2))
    x = rounded(head=h, vertex_angle=float(mp.radians(angle)), v_depth=depth)
    x["crest_height"] = short(max(0.15, h * d.even(0.2, 2)))
    x |= rounded(crest_length_along_flow=h / d.even(0.11, 0.9), approach_width=b * d.even(1.02, 1.8))
    return complete(x, d, spec)


def embankment_point(d, spec):
    h = d.spread(0.06, 1.2)
    b = h * d.even(2, 12)
    x = rounded(head=h, crest_width=b, crest_height=h * d.spread(0.4, 4))
    x["crest_length_along_flow"] = short(h / d.spread(0.1, 3))
    x["approach_width"] = short(b * d.even(1, 1.3))
    return complete(x, d, spec)


def crump_point(d, spec, ratio=None):
    h = d.spread(0.04, 1.2)
    b = h * d.even(2, 12)
    x = rounded(head=h, crest_width=b, crest_height=max(0.06, h / d.spread(0.25, 2.5)))
    x["approach_width"] = short(b * d.even(1, 1.5))
    tail = None if ratio is None else h * d.even(*ratio)
    return complete(x, d, spec, (), tail)


def streamlined_point(d, spec):
    x = crump_point(d, spec)
    keys = ["head", "crest_width", "crest_height", "approach_width"]
    own = {key: x.pop(key) for key in keys}
    return {**own, "discharge_coefficient": short(d.even(1.05, 1.25)), **x}


def flat_v_point(d, spec, share, ratio=None, n=None, p=None, depth=(0.05, 0.4)):
    """share: h over the height of the V."""
    n, v_height = d.even(10.2, 39.5) if n is None else d.even(*n), d.spread(*depth)
    h = v_height * d.even(*share)
    b = 2 * n * v_height
    x = rounded(head=h, crest_width=b, cross_slope=n, crest_height=h * d.spread(*(p or (0.5, 3))))
    x["approach_width"] = short(b * d.even(1, 1.2))
    tail = None if ratio is None else h * d.even(*ratio)
    return complete(x, d, spec, (), tail) if h > 0.03 else None


def flume_point(d, spec):
    h = d.spread(0.06, 1.3)
    b = h / d.spread(0.3, 2.8)
    x = rounded(head=h, throat_width=b, throat_length=h / d.even(0.12, 0.6))
    x["throat_invert_height"] = short(h * d.one_of(0, d.even(0.05, 0.8)))
    x |= rounded(approach_width=b * d.even(1.3, 3), approach_side_slope=d.even(0.05, 1.5))
    return complete(x, d, spec) if b > 0.1 else None


def trapezoidal_flume_point(d, spec):
    h = d.spread(0.06, 1.3)
    b, m = h / d.spread(0.4, 3), d.even(0.2, 2)
    x = rounded(head=h, throat_bottom_width=b, side_slope=m, throat_length=h / d.even(0.12, 0.6))
    x["throat_invert_height"] = short(h * d.one_of(0, d.even(0.05, 0.8)))
    x["approach_bottom_width"] = short(b * d.even(1.3, 4))
    x["approach_side_slope"] = short(d.one_of(0.0, d.even(0.2, 2), d.even(0.2, 2)))
    return complete(x, d, spec) if b > 0.1 else None


def u_flume_point(d, spec):
    h = d.spread(0.06, 1.2)
    diameter = h / d.even(0.2, 1.5)
    x = rounded(head=h, throat_diameter=diameter, throat_length=h / d.even(0.12, 0.6))
    x["throat_invert_height"] = short(h * d.one_of(0, d.even(0.05, 0.8)))
    x["approach_width"] = short(diameter * d.even(1.2, 2.5))
    x["approach_side_slope"] = short(d.one_of(0.0, d.even(0.1, 1.5)))
    return complete(x, d, spec) if diameter > 0.1 else None


def parshall_point(d, spec, ratio=None):
    low, high = PARSHALL[spec.choice][2:4]
    h = d.spread(low * 1.1, high * 0.98)
    tail = None if ratio is None else h * d.even(*ratio)
    return complete(rounded(head=h), d, spec, (), tail)


def end_depth_point(d, spec):
    h = d.spread(0.04, 0.9)
    return complete(rounded(head=h, channel_width=max(0.3, h * d.even(1, 8))), d, spec)


def compound_point(d, spec):
    h, p = d.spread(0.15, 1.0), d.spread(0.2, 1.5)
    x = rounded(head=h, approach_width=1, crest_height=p)
    levels = [0.0, h * d.even(0.2, 0.75), h * d.even(1.25, 1.8)]
    used = 0.0
    own = {}
    for i, kind in enumerate(spec.sections, 1):
        width = short(h * d.even(1.5, 5))
        used += width
        section = {"crest_level": short(levels[i - 1])}
        if kind == "rectangular-throated-flume":
            section |= {"throat_width": width, "throat_length": short(h * d.even(1.5, 4))}
        else:
            section["crest_width"] = width
        section["coefficient_factor"] = short(d.even(0.95, 1.05))
        if kind == "thin-plate-full-width":
            section["head_adjustment"] = d.adjustment()
        own |= {f"section {i} {key}": value for key, value in section.items()}
    if len(spec.sections) == 3 and levels[1] > 0.7 * h:
        return None
    x["approach_width"] = short(used * d.even(1.05, 1.5))
    x["gravity"] = short(d.even(9.78, 9.83))
    x["kinetic_energy_coefficient"] = short(d.even(1.0, 1.2))
    return x | own


def tailwater_point(d, spec, make, ratio):
    """A point and its table; the tailwater head is set where the table meets the structure."""
    x = make(d, spec, ratio=ratio)
    if x is None:
        return None
    exact_x = {key: mpf(value) for key, value in x.items()}
    with mp.workdps(20):
        modular = float(spec.law(exact_x, exact_x["head"], mpf(-1), spec))
    aim = x["tailwater_head"]
    shares = d.even(0.2, 0.4), d.even(0.5, 0.75), d.even(1.3, 1.6)
    discharges = [0.0] + [short(modular * share) for share in shares]
    # The level that is aimed at belongs to about 0.9 of the modular flow, between the last two nodes.
    slope = aim * d.even(0.3, 0.6) / modular
    below = d.even(1.2, 1.5), d.even(0.7, 0.9), d.even(0.25, 0.4), -0.5
    levels = [short(aim - slope * modular * share) for share in below]
    loose = spec.with_tailwater([mpf(q) for q in discharges], [mpf(level) for level in levels], mpf(0))
    exact_x["tailwater_head"] = mpf(0)
    q = Solver(exact_x, loose)(exact_x)
    x["tailwater_head"] = float(linear(loose.tailwater[0], loose.tailwater[1], q))
    if x["tailwater_head"] > 0.98 * x["head"]:
        return None
    tight = spec.with_tailwater(loose.tailwater[0], loose.tailwater[1], mpf(x["tailwater_head"]))
    return x, tight, {"discharge": discharges, "level": levels}


# What is wanted --------------------------------------------------------------


def families():
    """Name, equation, generator, branches wanted, number of points; a tailwater table or not."""
    crump = dict(area=approach)
    profile = "1:2/1:5"
    yield "m_a > 0", Spec(thin_plate_rectangular, "contracted"), rectangular_point, [], 8, None
    yield "m_a > 0", Spec(thin_plate_triangular, "partially contracted"), notch_point, [], 8, None

    yield "free", Spec(thin_plate_full_width, "Rehbock"), full_width_point, [], 20, None
    for name, modular in ("ISO 1438", [(-1.5, -0.05), (0.003, 0.008)]), ("Villemonte", [(-1.5, -0.05)]):
        spec = Spec(thin_plate_full_width, "Rehbock", drowned=name)
        drowned = lambda d, s: full_width_point(d, s, (0.05, 0.93))
        yield f"{name}, drowned", spec, drowned, ["drowned"], 10, None
        for low, high in modular:
            label = f"{name}, modular, h_2 {'above' if low > 0 else 'below'} the crest"
            make = lambda d, s, low=low, high=high: full_width_point(d, s, (low, high))
            yield label, spec, make, ["modular"], 5, None

    spec = Spec(thin_plate_trapezoidal, "fully contracted")
    yield "free", spec, trapezoidal_plate_point, [], 20, None
    yield "free", Spec(broad_crested_rectangular, "free"), broad_point, [], 30, None
    yield "free", Spec(broad_crested_round_nosed, "free", area=approach), round_nosed_point, [], 20, None
    spec = Spec(broad_crested_v_shaped, "free", area=approach)
    yield "below 1.25 H_b", spec, v_shaped_point, ["below 1.25 H_b"], 12, None
    yield "above 1.25 H_b", spec, v_shaped_point, ["above 1.25 H_b"], 12, None
    yield "free", Spec(trapezoidal_profile, "slopes 1:2", area=approach), embankment_point, [], 20, None

    yield "free", Spec(triangular_profile, profile, **crump), crump_point, [], 20, None
    spec = Spec(triangular_profile, profile, drowned="tailwater", **crump)
    for branch, ratio, count in [
        ("modular", (-1, 0.69), 6),
        ("branch 1", (0.71, 0.98), 10),
        ("branch 2", (0.93, 1.02), 10),
    ]:
        make = lambda d, s, ratio=ratio: crump_point(d, s, ratio)
        yield f"tailwater, {branch}", spec, make, [branch], count, None
    spec = Spec(triangular_profile, profile, drowned="crest tapping", **crump)
    for branch, ratio, count in [("modular", (-0.5, 0.185), 6), ("drowned", (0.22, 0.93), 10)]:
        make = lambda d, s, ratio=ratio: crump_point(d, s, ratio)
        yield f"crest tapping, {branch}", spec, make, [branch], count, None
    yield "free", Spec(streamlined_triangular_profile, "free", area=approach), streamlined_point, [], 20, None

    inside, above, tapping = "inside the V", "above the V", "crest tapping"
    fast = {"p": (0.4, 0.8), "depth": (0.15, 0.5)}  # velocity head above k_h
    slow = {"p": (6, 12), "n": (10.2, 14), "depth": (0.032, 0.12)}  # and below it
    for regime, effective, share, more, count in [
        (inside, "H_e in the V", (0.3, 0.97), {}, 12),
        (inside, "H_e above the V", (0.95, 0.998), fast, 6),
        (above, "H_e above the V", (1.01, 2.5), {}, 12),
        (above, "H_e in the V", (1.0012, 1.006), slow, 5),
    ]:
        spec = Spec(flat_v, regime, area=approach)
        make = lambda d, s, share=share, more=more: flat_v_point(d, s, share, **more)
        yield f"free, {regime}, {effective}", spec, make, [effective], count, None
    for regime, effective, share, more, branch, ratio, count in [
        (inside, "H_e in the V", (0.3, 0.97), {}, "drowned", (0.4, 0.9), 6),
        (inside, "H_e above the V", (0.97, 0.998), fast, "drowned", (0.4, 0.8), 5),
        (above, "H_e above the V", (1.01, 2.5), {}, "drowned", (0.4, 0.9), 6),
        (above, "H_e in the V", (1.0012, 1.006), slow, "drowned", (0.4, 0.9), 5),
        (inside, "H_e in the V", (0.3, 0.97), {}, "modular", (-0.3, 0.385), 5),
        (above, "H_e above the V", (1.01, 2.5), {}, "modular", (-0.3, 0.385), 5),
    ]:
        spec = Spec(flat_v, regime, drowned=tapping, area=approach)
        make = lambda d, s, share=share, more=more, ratio=ratio: flat_v_point(d, s, share, ratio, **more)
        yield f"{tapping}, {branch}, {regime}, {effective}", spec, make, [effective, branch], count, None

    spec = Spec(rectangular_throated_flume, "free", area=throat_approach)
    yield "m_a > 0", spec, flume_point, [], 8, None
    critical = trapezoid_cd, trapezoid
    spec = Spec(trapezoidal_throated_flume, "free", area=trapezoidal_approach, critical=critical)
    yield "free", spec, trapezoidal_flume_point, [], 20, None
    spec = Spec(u_throated_flume, "free", area=throat_approach, critical=(circle_cd, u_section))
    for branch in "below the springing", "above the springing":
        yield branch, spec, u_flume_point, [branch], 11, None

    for size in PARSHALL:
        yield "free", Spec(parshall_flume, "free", size), parshall_point, [], 1, None
    modular_too = ["0.30 m", "0.60 m", "1.00 m", "2.40 m", "1 ft", "2 ft", "5 ft", "8 ft"]
    for size, (_, _, _, _, limit, width) in PARSHALL.items():
        if width is None:
            continue
        spec = Spec(parshall_flume, "free", size, "Parshall 1936")
        make = lambda d, s, limit=float(limit): parshall_point(d, s, (limit * 1.005, 0.9))
        yield "Parshall 1936, drowned", spec, make, ["drowned"], 1, None
        if size in modular_too:
            make = lambda d, s, limit=float(limit): parshall_point(d, s, (-0.3, limit * 0.99))
            yield "Parshall 1936, modular", spec, make, ["modular"], 1, None
    for size, (*_, limit) in SKOGERBOE.items():
        spec = Spec(parshall_flume, "free", size, "Skogerboe 1967")
        make = lambda d, s, limit=float(limit): parshall_point(d, s, (limit * 1.03, 0.94))
        yield "Skogerboe 1967, drowned", spec, make, ["drowned"], 2, None
        make = lambda d, s, limit=float(limit): parshall_point(d, s, (-0.3, limit * 0.99))
        yield "Skogerboe 1967, modular", spec, make, ["modular"], 1, None

    for nappe in END_DEPTH:
        yield nappe, Spec(end_depth, "free", nappe), end_depth_point, [], 10, None

    flume = "rectangular-throated-flume"
    for name, sections, branches in [
        ("(a)", ["triangular-profile"] * 2, []),
        ("(b)", ["triangular-profile", "thin-plate-full-width"], []),
        ("(c)", [flume] * 3, ["section 3 dry"]),
    ]:
        spec = Spec(compound, None, sections=sections, area=approach)
        yield name, spec, compound_point, branches, 7, None

    spec = Spec(triangular_profile, profile, drowned="tailwater", **crump)
    yield "table, branch 1", spec, crump_point, ["branch 1"], 4, (0.78, 0.95)
    yield "table, branch 2", spec, crump_point, ["branch 2"], 4, (0.95, 1.05)
    spec = Spec(thin_plate_full_width, "Rehbock", drowned="ISO 1438")
    yield "table, ISO 1438", spec, full_width_point, ["drowned"], 6, (0.2, 0.9)
    spec = Spec(parshall_flume, "free", "1 ft", "Parshall 1936")
    yield "table, Parshall 1936", spec, parshall_point, ["drowned"], 6, (0.74, 0.92)


def points_of(family):
    label, spec, make, wanted, count, table_ratio = family
    draw = Draw(" ".join(str(part) for part in (spec.kind, spec.choice, spec.sections, label)))
    found, trials = [], 0
    while len(found) < count:
        trials += 1
        assert trials < 4000, ("no such points", spec.kind, label)
        use, levels = spec, None
        try:
            if table_ratio is None:
                inputs = make(draw, spec)
            else:
                inputs = tailwater_point(draw, spec, make, table_ratio)
                if inputs is not None:
                    inputs, use, levels = inputs
            if inputs is None:
                continue
            x = {key: mpf(value) for key, value in inputs.items()}
            _, taken = examine(x, use)
        except (Outside, ValueError, ZeroDivisionError):
            continue
        if taken == wanted:
            q, derivatives = derivatives_of(x, use)
            found.append((use, levels, inputs, q, derivatives))
    return found


# Nodes -----------------------------------------------------------------------


def node_points():
    """Equation, inputs, the input that crosses the node, whether the table's argument rises with it."""
    common = {"coefficient_factor": 1.01, "gravity": 9.80665}
    broad = Spec(broad_crested_rectangular, "free")

    def broad_inputs(h, p, length):
        return {"head": h, "crest_width": 1.2, "crest_height": p, "crest_length_along_flow": length, **common}

    yield broad, broad_inputs(0.25, 0.7, 0.5), "head", True  # h/L = 0.5
    yield broad, broad_inputs(0.5, 0.75, 0.5), "crest_length_along_flow", False  # h/L = 1
    yield broad, broad_inputs(0.25, 0.5, 0.72), "head", True  # h/p = 0.5
    yield broad, broad_inputs(0.375, 0.375, 0.42), "crest_height", False  # h/p = 1

    both = {"coefficient_factor": 0.99, "gravity": 9.81, "kinetic_energy_coefficient": 1.05}
    flat = {"crest_width": 4.0, "cross_slope": 20.0, "crest_height": 0.3, "approach_width": 4.2, **both}
    yield Spec(flat_v, "inside the V", area=approach), {"head": 0.08, **flat}, "cross_slope", True
    yield Spec(flat_v, "above the V", area=approach), {"head": 0.19, **flat}, "cross_slope", True

    notch = Spec(thin_plate_triangular, "fully contracted")
    for degrees, h in (60, 0.15), (40, 0.21):
        angle = float(mp.radians(degrees))
        inputs = {"head": h, "notch_angle": angle, "crest_height": 0.8, "approach_width": 1.5}
        inputs |= {"approach_side_slope": 0.0, "coefficient_factor": 1.01, "head_adjustment": 0.0002}
        yield notch, inputs | {"gravity": 9.80665}, "notch_angle", True

    plate = Spec(thin_plate_rectangular, "contracted")
    for by, h, rises in ("crest_width", 0.2, True), ("approach_width", 0.33, False):
        inputs = {"head": h, "crest_width": 0.75, "approach_width": 1.5, "approach_side_slope": 0.0}
        inputs |= {"crest_height": 0.4, "coefficient_factor": 0.98, "head_adjustment": -0.0001}
        yield plate, inputs | {"width_adjustment": 0.0003, "gravity": 9.80665}, by, rises


def node_slopes(spec, inputs, by, rises):
    x = {key: mpf(value) for key, value in inputs.items()}
    slopes = {}
    for side in "below", "above":
        Watch.side = side
        q, derivatives = derivatives_of(x, spec, [by])
        slopes[side if rises else {"below": "above", "above": "below"}[side]] = derivatives[by]
    Watch.side = None

    def discharge_at(value):
        moved = {**x, by: value}
        return Solver(moved, spec)(moved)

    step = x[by] * NODE_STEP  # and a rough check without any choice of a segment
    for side, sign in ("below", -1), ("above", 1):
        near, far = discharge_at(x[by] + sign * step), discharge_at(x[by] + 2 * sign * step)
        rough = sign * (far - near) / step
        assert abs(rough - slopes[side]) < NODE_TOLERANCE * abs(slopes[side]), (spec.kind, by, side)
    assert abs(slopes["above"] - slopes["below"]) > 100 * NODE_TOLERANCE * abs(slopes["above"])
    return slopes


# The file --------------------------------------------------------------------

SOURCE = (
    "Computed with 50 significant digits (mpmath) by catalogue.py in this directory from the equations of "
    "ISO 1438, ISO 3846, ISO 4359, ISO 4360, ISO 4374, ISO 4377, ISO 8333, ISO 9826, ISO 9827, ISO 14139, "
    "ISO 18481, ASTM D1941, the USBR Water Measurement Manual, and papers named there; derivatives by numerical "
    "differentiation and, for implicit equations, by the implicit-function theorem, which agree. "
    "SI units: m, rad, m/s2, m3/s. Some constants are from memory: see catalogue.py."
)


def text_or_null(value):
    return "null" if value is None else f'"{value}"'


def numbers(values):
    return "[" + ", ".join(repr(value) for value in values) + "]"


def point_text(use, levels, inputs, q, derivatives):
    head = ", ".join(
        f'"{key}": {text_or_null(getattr(use, key))}' for key in ("kind", "regime", "choice", "drowned")
    )
    lines = [f"    {{{head},"]
    if use.sections:
        sections = ", ".join(f'{{"kind": "{kind}"}}' for kind in use.sections)
        lines.append(f'     "sections": [{sections}],')
    if levels:
        lines.append(f'     "tailwater_table": {table(levels, numbers)},')
    lines.append(f'     "inputs": {table(inputs, repr)},')
    lines.append(f'     "discharge": {number(q)},')
    lines.append(f'     "derivatives": {table(derivatives, number)}}}')
    return "\n".join(lines)


def node_text(spec, inputs, by, rises):
    slopes = node_slopes(spec, inputs, by, rises)
    return (
        f'    {{"kind": "{spec.kind}", "regime": "{spec.regime}",\n'
        f'     "inputs": {table(inputs, repr)},\n'
        f'     "by": "{by}", "below": {number(slopes["below"])}, "above": {number(slopes["above"])}, '
        f'"segment_above": "{"above" if rises else "below"}"}}'
    )


def main():
    blocks, tally = [], Counter()
    for family in families():
        for point in points_of(family):
            blocks.append(point_text(*point))
            tally[family[1].kind, family[0]] += 1
    nodes = [node_text(*node) for node in node_points()]
    text = f'{{\n  "source": "{SOURCE}",\n  "points": [\n' + ",\n".join(blocks)
    text += '\n  ],\n  "nodes": [\n' + ",\n".join(nodes) + "\n  ]\n}\n"
    pathlib.Path(__file__).with_name("catalogue.json").write_text(text, encoding="utf-8")
    for (kind, label), count in tally.items():
        print(f"{count:4} {kind}: {label}")
    print(f"{len(blocks):4} points, {len(nodes)} nodes")


if __name__ == "__main__":
    main()
