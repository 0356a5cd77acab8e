#!/usr/bin/env python3
"""Measures the demo disk: wall time on one and two threads, work per cell, peak memory, file size.

    python3 tools/bench/demo.py [CASE]

Builds in release mode, runs the case afresh for each thread count into a temporary folder and prints
a table for tools/bench/RESULTS.md. Needs h5py only for the work counters (the tests' environment has
it: .venv/bin/python). Nothing else should run on the machine meanwhile.
"""
import os
import pathlib
import resource
import subprocess
import sys
import tempfile
import time

TOP = pathlib.Path(__file__).resolve().parents[2]


def run(case, threads, folder):
    """Wall seconds, CPU seconds, peak resident MB and the run file of one fresh run."""
    output = pathlib.Path(folder) / f"bench{threads}.h5"
    before = resource.getrusage(resource.RUSAGE_CHILDREN)
    clock = time.monotonic()
    subprocess.run([TOP / "target/release/frostclock", "--quiet", "run", case, "--threads", str(threads),
                    "--output", output], check=True)
    wall = time.monotonic() - clock
    after = resource.getrusage(resource.RUSAGE_CHILDREN)
    cpu = after.ru_utime + after.ru_stime - before.ru_utime - before.ru_stime
    return wall, cpu, after.ru_maxrss / 1024.0, output


def counters(path):
    """Median and largest of each work counter over the cells."""
    try:
        import h5py
    except ImportError:
        return "(no h5py: counters left out)"
    with h5py.File(path) as file:
        rows = {name: sorted(float(v) for v in file["work"][name][:]) for name in file["work"]
                if file["work"][name].ndim == 1 and len(file["work"][name]) == len(file["cell"])}
    return "\n".join(f"| {name} | {v[len(v) // 2]:.6g} | {v[-1]:.6g} |" for name, v in rows.items())


def main(case):
    subprocess.run(["cargo", "build", "--release", "--locked", "--quiet"], cwd=TOP, check=True)
    with tempfile.TemporaryDirectory() as folder:
        print(f"case {case}; {os.cpu_count()} processors")
        print("| threads | wall s | CPU s | peak MB | file MB |\n|---|---|---|---|---|")
        for threads in (1, 2):
            # A process of its own, so that the peak memory is that of this run and not of the build.
            subprocess.run([sys.executable, __file__, "--one", str(threads), folder, case], check=True)
        print("\n| counter | median cell | largest |\n|---|---|---|")
        print(counters(pathlib.Path(folder) / "bench2.h5"))


if __name__ == "__main__":
    if sys.argv[1:2] == ["--one"]:
        threads, folder, case = int(sys.argv[2]), sys.argv[3], sys.argv[4]
        wall, cpu, memory, output = run(case, threads, folder)
        print(f"| {threads} | {wall:.1f} | {cpu:.1f} | {memory:.0f} | {output.stat().st_size / 1e6:.1f} |")
    else:
        main(sys.argv[1] if len(sys.argv) > 1 else str(TOP / "cases/tirune.yaml"))
