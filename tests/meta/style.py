# SPDX-License-Identifier: GPL-3.0-or-later
"""Limits of size in C files: style.py SOURCE.

No line over 80 columns (a tab counts to the next multiple of 8), no function
over 60 lines between its braces, no file over 600 lines.
"""
import re
import sys

import tree

SOURCE = sys.argv[1]
COLUMNS_MAX = 80
FUNCTION_LINES_MAX = 60
FILE_LINES_MAX = 600


def check_functions(path, lines, wrong):
    """The project's functions open and close with a brace in column 0."""
    name, opened = "", None
    for number, line in lines:
        called = re.match(r"(\w+)\(", line)
        if called:
            name = called.group(1)
        elif line == "{":
            opened = number
        elif line == "}" and opened is not None:
            if number - opened - 1 > FUNCTION_LINES_MAX:
                wrong.append(f"{path}:{opened}: function {name} has "
                             f"{number - opened - 1} lines, allowed "
                             f"{FUNCTION_LINES_MAX}")
            opened = None


def main():
    wrong, count = [], 0
    for path in tree.files(SOURCE):
        if not path.endswith((".c", ".h")):
            continue
        count += 1
        lines = tree.lines(SOURCE, path)
        for number, line in lines:
            columns = len(line.expandtabs(8))
            if columns > COLUMNS_MAX:
                wrong.append(f"{path}:{number}: {columns} columns, allowed "
                             f"{COLUMNS_MAX}")
        if len(lines) - 1 > FILE_LINES_MAX:
            wrong.append(f"{path}: {len(lines) - 1} lines, allowed "
                         f"{FILE_LINES_MAX}")
        check_functions(path, lines, wrong)
    print(f"{count} files")
    print("\n".join(wrong))
    return 1 if wrong or count < 50 else 0


if __name__ == "__main__":
    sys.exit(main())
