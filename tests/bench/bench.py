# SPDX-License-Identifier: GPL-3.0-or-later
"""What the benchmarks share: programs, medians and the table of figures."""
import json
import os
import pathlib
import statistics
import sys

HERE = pathlib.Path(__file__).resolve().parent
SOURCE = HERE.parents[1]
os.environ.setdefault("PLAFOND_BUILD", str(SOURCE / "build-bench"))
os.environ["PATH"] = "/usr/sbin:/usr/bin:/sbin:/bin"
sys.path.insert(0, str(HERE.parent / "net"))

import harness  # noqa: E402  (the path comes first)

BUILD = harness.BUILD
EXAMPLE = SOURCE / "controller/examples/host.yaml"


def in_namespaces(work):
    """Start anew in namespaces of our own and do the work there."""
    if "PLAFOND_BENCH_INSIDE" not in os.environ:
        words = harness.namespace_command()
        if words is None:
            print("skip: network namespaces are not allowed here")
            return 77
        os.environ["PLAFOND_BENCH_INSIDE"] = "yes"
        sys.stdout.flush()
        os.execvp(words[0], words + [sys.executable, "-B"] + sys.argv)
    harness.enter()
    return work()


def spread(values):
    """median (least .. greatest) as text, without unit."""
    return (f"{statistics.median(values):.3f} "
            f"({min(values):.3f} .. {max(values):.3f})")


def figure(what, found, unit, limit=None, least=False):
    """Print one figure and keep it for the table of all.  `limit` is what is
    required: at most, or with `least` at least."""
    good = None
    if limit is not None:
        good = found >= limit if least else found <= limit
    row = {"what": what, "found": found, "unit": unit, "limit": limit,
           "least": least, "good": good}
    path = os.environ.get("PLAFOND_BENCH_ROWS")
    if path:
        with open(path, "a") as file:
            file.write(json.dumps(row) + "\n")
    print_row(row)
    return good is not False


def print_row(row):
    required = ""
    if row["limit"] is not None:
        required = f"{'>=' if row['least'] else '<='} {row['limit']:g}"
    mark = {None: "", True: "reached", False: "MISSED"}[row["good"]]
    print(f"{row['what']:<52} {row['found']:>10.4g} {row['unit']:<6} "
          f"{required:>9} {mark}".rstrip(), flush=True)


def main():
    for line in pathlib.Path(sys.argv[1]).read_text().splitlines():
        print_row(json.loads(line))


if __name__ == "__main__":
    main()
