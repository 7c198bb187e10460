# SPDX-License-Identifier: GPL-3.0-or-later
"""Run one test function: run_one.py FILE FUNCTION.

Status 0 passed, 1 failed, 77 skipped with a line "skip: REASON".
"""
import importlib.util
import inspect
import os
import pathlib
import sys
import traceback

HERE = pathlib.Path(__file__).resolve().parent
sys.path.insert(0, str(HERE))
os.environ["PATH"] = "/usr/sbin:/usr/bin:/sbin:/bin"
INSIDE = "PLAFOND_TEST_INSIDE"

import harness  # noqa: E402  (the path comes first)


def load(file_name):
    path = HERE / file_name
    spec = importlib.util.spec_from_file_location(path.stem, path)
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module


def skip(reason):
    print(f"skip: {reason}")
    return 77


def main():
    try:
        test = getattr(load(sys.argv[1]), sys.argv[2])
    except ModuleNotFoundError as error:
        return skip(f"Python's module {error.name} is not installed")
    if not getattr(test, "plain", False):
        if INSIDE not in os.environ:
            words = harness.namespace_command()
            if words is None:
                return skip("network namespaces are not allowed here")
            os.environ[INSIDE] = "yes"
            sys.stdout.flush()
            os.execvp(words[0], words + [sys.executable, "-B"] + sys.argv)
        harness.enter()
    try:
        if inspect.signature(test).parameters:
            raise TypeError("a test takes no arguments")
        test()
    except harness.Skip as reason:
        return skip(reason)
    except BaseException:
        traceback.print_exc()
        return 1
    return 0


if __name__ == "__main__":
    sys.exit(main())
