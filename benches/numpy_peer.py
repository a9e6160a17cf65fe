"""The Monte Carlo run of weir.toml at a head of 0.2 m, as a vectorised numpy script: the yardstick of
the benches. The same model, sources and number of trials, on one thread.

    pip install numpy
    python benches/numpy_peer.py [--rounds N] [--trials N] [--seed N]

Prints one JSON object: the value at the indicated inputs, mean, standard uncertainty, both 95 % coverage
intervals, and the median CPU and wall time of one run. A round is a run from drawing to intervals; the
time of starting Python and loading numpy is not in it. compare.py sets this beside `nappe`.
"""

import os

os.environ["OMP_NUM_THREADS"] = "1"  # before numpy is loaded

import argparse
import json
import math
import statistics
import time

import numpy as np

# Inputs of weir.toml, SI units.
HEAD = 0.2
CREST_WIDTH = 0.8
CREST_HEIGHT = 0.5
GRAVITY = 9.80665

# Rectangular thin-plate weir over the full width: C_e = a + c h/p, head and width adjustments.
A, C = 0.602, 0.075
K_H, K_B = 0.001, -0.0009

# Standard uncertainties of the normal errors. The coefficient's is relative: 1.5 % at 95 %.
U_ZERO = 1.0e-3
U_TAPE = 0.8e-3
U_COEFFICIENT = 0.015 / 2
U_K_H = 0.15e-3
U_K_B = 0.15e-3
# Half-widths of the bounded errors.
SENSOR = 2.0e-3  # rectangular
SWELL = 1.5e-3  # arcsine
SILT = 15e-3  # triangular

PROBABILITY = 0.95


def discharge(head, width, height, factor, k_h, k_b):
    coefficient = A + C * head / height
    root = math.sqrt(2 * GRAVITY)
    return 2 / 3 * root * factor * coefficient * (width + k_b) * (head + k_h) ** 1.5


def run(trials, seed):
    rng = np.random.default_rng(seed)
    # An error is indicated minus true, so a true value is the indicated one minus the error.
    head = (
        HEAD
        - rng.normal(0.0, U_ZERO, trials)
        - rng.uniform(-SENSOR, SENSOR, trials)
        - SWELL * np.sin(rng.uniform(0.0, 2 * math.pi, trials))
    )
    width = rng.normal(CREST_WIDTH, U_TAPE, trials)
    height = rng.triangular(CREST_HEIGHT - SILT, CREST_HEIGHT, CREST_HEIGHT + SILT, trials)
    factor = rng.normal(1.0, U_COEFFICIENT, trials)
    k_h = rng.normal(K_H, U_K_H, trials)
    k_b = rng.normal(K_B, U_K_B, trials)
    flow = discharge(head, width, height, factor, k_h, k_b)
    mean, deviation = flow.mean(), flow.std(ddof=1)
    # Order statistics as in JCGM 101 7.7; one sort serves both intervals.
    flow.sort()
    inside = int(PROBABILITY * trials + 0.5)
    outside = trials - inside
    low = (outside + 1) // 2 - 1
    shortest = int(np.argmin(flow[inside:] - flow[:outside]))
    return {
        "mean": float(mean),
        "standard_uncertainty": float(deviation),
        "interval_symmetric": [float(flow[low]), float(flow[low + inside])],
        "interval_shortest": [float(flow[shortest]), float(flow[shortest + inside])],
    }


def main():
    parser = argparse.ArgumentParser()
    parser.add_argument("--rounds", type=int, default=9)
    parser.add_argument("--trials", type=int, default=1_000_000)
    parser.add_argument("--seed", type=int, default=1)
    arguments = parser.parse_args()
    cpu, wall = [], []
    for _ in range(arguments.rounds):
        cpu_start, wall_start = time.process_time(), time.perf_counter()
        result = run(arguments.trials, arguments.seed)
        cpu.append(time.process_time() - cpu_start)
        wall.append(time.perf_counter() - wall_start)
    result["value"] = discharge(HEAD, CREST_WIDTH, CREST_HEIGHT, 1.0, K_H, K_B)
    result["run_cpu_seconds"] = statistics.median(cpu)
    result["run_wall_seconds"] = statistics.median(wall)
    print(json.dumps(result, indent=2))


if __name__ == "__main__":
    main()
