#!/usr/bin/python3
"""Times the numpy chain from inside, after its imports: `reference_timing.py parse DIR PASSES` or `chain DIR OUT JOBS`. JSON out."""
import glob
import json
import os
import resource
import sys
import time

sys.path.insert(0, os.path.dirname(os.path.abspath(__file__)))
import numpy as np
import pandas as pd
import reference_chain as chain


def cpu():
    own, children = resource.getrusage(resource.RUSAGE_SELF), resource.getrusage(resource.RUSAGE_CHILDREN)
    return own.ru_utime + own.ru_stime + children.ru_utime + children.ru_stime


def measured(work):
    began, wall = cpu(), time.perf_counter()
    work()
    return dict(cpuS=cpu() - began, wallS=time.perf_counter() - wall)


def parse(folder, passes):
    files = sorted(glob.glob(os.path.join(folder, "HOF_*.csv")))

    def numbers():
        for path in files:
            pd.read_csv(path, engine="c", skiprows=3, header=None, names=chain.COLUMNS, na_values=["NaN", "-9999"],
                        dtype={c: np.float64 for c in chain.COLUMNS[1:]})

    def with_stamps():
        for path in files:
            chain.read_file(path)

    return dict(numbers=[measured(numbers) for _ in range(passes)],
                withStamps=[measured(with_stamps) for _ in range(passes)])


def whole(folder, out, jobs):
    start_up = cpu()
    sys.argv = ["reference_chain.py", folder, "--out", out, "--jobs", jobs]
    done = measured(chain.main)
    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024
    return dict(startUpCpuS=start_up, peakMb=peak, **done)


task, folder, *rest = sys.argv[1:]
json.dump(parse(folder, int(rest[0])) if task == "parse" else whole(folder, *rest), sys.stdout)
