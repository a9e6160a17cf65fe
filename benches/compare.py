"""A million trials of weir.toml on one thread: `nappe` beside numpy_peer.py, in turn, in one session.

    pip install numpy
    python benches/compare.py [--rounds N]

Builds `nappe` in release, then times in every round the whole process of `nappe`, the whole process of
the numpy script, and a run within numpy, already loaded (median of five). Prints medians of the CPU time
and their ratios, and checks that both say the same. Unix only: CPU times are the operating system's.
"""

import argparse
import json
import statistics
import subprocess
import sys
from pathlib import Path
from resource import RUSAGE_CHILDREN, getrusage

BENCHES = Path(__file__).resolve().parent
ROOT = BENCHES.parent


def timed(command):
    """CPU seconds of a whole process, and the JSON object that it prints."""
    before = getrusage(RUSAGE_CHILDREN)
    output = subprocess.run(command, check=True, stdout=subprocess.PIPE).stdout
    after = getrusage(RUSAGE_CHILDREN)
    cpu = after.ru_utime + after.ru_stime - before.ru_utime - before.ru_stime
    return cpu, json.loads(output)


def build():
    subprocess.run(["cargo", "build", "--release", "--locked", "--quiet"], cwd=ROOT, check=True)
    metadata = ["cargo", "metadata", "--no-deps", "--format-version", "1"]
    found = subprocess.run(metadata, cwd=ROOT, check=True, stdout=subprocess.PIPE)
    return Path(json.loads(found.stdout)["target_directory"]) / "release" / "nappe"


def check(nappe, numpy):
    """Both have other random numbers: they agree within what a million trials leave open."""
    carlo, tolerance = nappe["monte_carlo"], 0.02 * numpy["standard_uncertainty"]
    pairs = [
        ("value", nappe["result"]["value"], numpy["value"], 1e-12),
        ("mean", carlo["mean"], numpy["mean"], tolerance),
        ("u", carlo["standard_uncertainty"], numpy["standard_uncertainty"], tolerance),
    ]
    # The shortest interval is a flat minimum: its ends are less well determined, its length is not.
    for name, factor in [("symmetric", 1), ("shortest", 10)]:
        ours, theirs = carlo[f"interval_{name}"], numpy[f"interval_{name}"]
        ends = zip(["low", "high"], ours, theirs)
        pairs += [(f"{name} {end}", a, b, factor * tolerance) for end, a, b in ends]
        length = ours[1] - ours[0], theirs[1] - theirs[0]
        pairs.append((f"{name} length", *length, tolerance))
    print(f"{'':18}{'nappe':>14}{'numpy':>14}   m3/s")
    for name, ours, theirs, allowed in pairs:
        print(f"{name:18}{ours:14.8f}{theirs:14.8f}")
        if abs(ours - theirs) > allowed:
            sys.exit(f"{name}: the two differ by more than {allowed:.2g}")


def main():
    parser = argparse.ArgumentParser()
    parser.add_argument("--rounds", type=int, default=9)
    rounds = parser.parse_args().rounds
    station = [str(build()), "budget", str(BENCHES / "weir.toml"), "--head", "0.2 m"]
    options = ["--trials", "1000000", "--threads", "1", "--format", "json"]
    script = [sys.executable, str(BENCHES / "numpy_peer.py"), "--rounds"]
    figures = {"nappe, process": [], "numpy, process": [], "numpy, run": []}
    for _ in range(rounds):
        cpu, nappe = timed(station + options)
        figures["nappe, process"].append(cpu)
        figures["numpy, process"].append(timed([*script, "1"])[0])
        numpy = timed([*script, "5"])[1]
        figures["numpy, run"].append(numpy["run_cpu_seconds"])
    check(nappe, numpy)
    ours = figures["nappe, process"]
    print(f"\n{'CPU time, ' + str(rounds) + ' rounds':26}{'median':>12}{'over nappe':>14}")
    for name, times in figures.items():
        ratio = statistics.median(time / own for time, own in zip(times, ours))
        print(f"{name:26}{statistics.median(times) * 1000:9.1f} ms{ratio:14.2f}")


if __name__ == "__main__":
    main()
