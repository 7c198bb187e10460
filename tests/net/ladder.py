# SPDX-License-Identifier: GPL-3.0-or-later
"""Ladders of the real program: declarations in, octets at each layer out.

`plafond ceiling FILE --format json` is all that is used.  What the program
says is never an expected value: callers build the same packet by other means
and compare.
"""
import concurrent.futures
import json
import pathlib
import subprocess
import tempfile
from fractions import Fraction

import harness

WORKERS = 2		# programs at once


class Ladder:
    """One direction of one run."""

    def __init__(self, ceiling):
        self.ceiling = ceiling
        self.levels = {row["level"]: row["bytes"]
                       for row in ceiling["levels"]}
        self.steps = [(row["name"], row["bytes"])
                      for row in ceiling["ladder"] if row["bytes"]]

    @property
    def payload(self):
        return self.levels["payload"]

    def costs(self, stack):
        """Octets that each layer of the stack adds, lowest first.  The steps
        come from the line upward, and a layer's own lie together: what is
        around it, its header with all that belongs to it, its padding.  Steps
        of the medium and of acknowledgements belong to none."""
        costs = [Fraction(0)] * len(stack)
        at, seen = -1, set()
        steps = self.steps
        if stack[0] == "wlan":		# the medium's steps have that name too
            own = [name.startswith("wlan: ") for name, _ in steps]
            steps = steps[len(own) - 1 - own[::-1].index(True):]
        for name, octets in steps:
            layer, _, what = name.partition(": ")
            if not what or layer not in stack:
                continue
            twin = stack[at:at + 2] == [layer, layer] and what != "padding"
            if at == -1 or stack[at] != layer or what in seen or twin:
                at, seen = stack.index(layer, at + 1), set()
            seen.add(what)
            costs[at] += Fraction(octets)
        return costs


def declaration_text(declared):
    return "".join(f"{key}: {harness.yaml_text(value)}\n"
                   for key, value in declared.items())


def run_program(words):
    """Standard output of `plafond` that must succeed."""
    done = subprocess.run(
        [str(harness.CONTROLLER), *words], text=True,
        stdin=subprocess.DEVNULL, capture_output=True,
        env=harness.environment())
    assert done.returncode == 0, \
        f"{words}: status {done.returncode}\n{done.stderr}"
    return done.stdout


def in_parallel(function, items):
    """function of each item, in order; it waits for programs."""
    with concurrent.futures.ThreadPoolExecutor(WORKERS) as pool:
        return list(pool.map(function, items))


def reports(jobs):
    """[(declaration, [words])]: the JSON of each, in order."""
    with tempfile.TemporaryDirectory(prefix="plafond-ladder-") as folder:
        paths = {}
        for declared, _ in jobs:
            text = declaration_text(declared)
            if text not in paths:
                path = pathlib.Path(folder) / f"{len(paths)}.yaml"
                path.write_text(text)
                paths[text] = path
        return [json.loads(text) for text in in_parallel(
            lambda job: run_program(
                ["ceiling", paths[declaration_text(job[0])],
                 "--format", "json", *job[1]]), jobs)]


def ladders(jobs, direction="a-to-b"):
    """The same, as one Ladder each."""
    return [Ladder(next(ceiling for ceiling in report["ceilings"]
                        if ceiling["direction"] == direction))
            for report in reports(jobs)]


class Point:
    """One direction at one value of a sweep: rates alone."""

    def __init__(self, point, direction="a-to-b"):
        assert not point["refused"], point
        self.number = point["number"]
        self.ceiling = next(ceiling for ceiling in point["ceilings"]
                            if ceiling["direction"] == direction)

    def bps(self, level):
        return self.ceiling[level + "_bps"]


def sweeps(jobs):
    """[(declaration, "KEY=FROM..TO:STEP")]: the points of each, in order."""
    with_words = [(declared, ["--sweep", text]) for declared, text in jobs]
    return [report["points"] for report in reports(with_words)]
