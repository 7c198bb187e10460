#!/usr/bin/python3
# SPDX-License-Identifier: GPL-3.0-or-later
"""Read ctest's JUnit file: say what failed and what was skipped and why, and
end with the line "N passed, N failed, N skipped"."""
import sys
import xml.etree.ElementTree as ElementTree


def outcome(case):
    """passed, failed or skipped of one testcase element."""
    if case.find("failure") is not None or case.get("status") == "fail":
        return "failed"
    if case.find("skipped") is not None:
        # A program that could not be run at all is no skip.
        message = case.find("skipped").get("message", "")
        return "skipped" if "SKIP_RETURN_CODE" in message else "failed"
    return "passed" if case.get("status") == "run" else "failed"


def reason(case):
    """The line "skip: ..." of the test's output."""
    for line in (case.findtext("system-out") or "").splitlines():
        if line.startswith("skip: "):
            return line[len("skip: "):]
    return "no reason given"


def main():
    try:
        cases = ElementTree.parse(sys.argv[1]).getroot().iter("testcase")
    except (OSError, ElementTree.ParseError) as error:
        print(f"tests: no results: {error}")
        return 1
    counts = {"passed": 0, "failed": 0, "skipped": 0}
    for case in cases:
        kind = outcome(case)
        counts[kind] += 1
        if kind == "failed":
            print(f"failed: {case.get('name')}")
        elif kind == "skipped":
            print(f"skipped: {case.get('name')}: {reason(case)}")
    print("{passed} passed, {failed} failed, {skipped} skipped"
          .format(**counts))
    return 1 if counts["failed"] or not counts["passed"] else 0


if __name__ == "__main__":
    sys.exit(main())
