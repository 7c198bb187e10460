# SPDX-License-Identifier: GPL-3.0-or-later
"""Words that this project does not use, and the line that every program file
has: words.py SOURCE.

A rate is never called bandwidth, which is in hertz; units are written as in
IEC 80000-13; delay variation has the name that its criterion has.
"""
import re
import sys

import tree

SOURCE = sys.argv[1]
LICENCE = "SPDX-License-Identifier: GPL-3.0-or-later"
# This file names them, the licence is not ours, and a fuzz corpus and the
# vectors of units hold what people may type.
SKIPPED = re.compile(r"tests/meta/words\.py|LICENSE|tests/fuzz/corpus/.*|"
                     r"tests/unit/shared/test_(units|field)\w*\.c")

# word, what lies near where it is right nevertheless, what to write instead
WORDS = [
    (r"bandwidth(?!-delay)", r"hertz|[kMGT]?Hz\b|_hz\b",
     "throughput or rate; bandwidth is in hertz"),
    (r"\b[kmgt]bps\b", None, "kbit/s, Mbit/s, Gbit/s"),
    (r"\b[kMGT]b/s", None, "kbit/s, Mbit/s, Gbit/s"),
    (r"jitter", r"RFC 3550", "delay variation"),
    (r"speed[ _-]?(test|check|meter)", None, "trial, measurement"),
]


def check_words(path, wrong):
    lines = tree.lines(SOURCE, path)
    for number, line in lines:
        near = " ".join(other for _, other in lines[max(number - 2, 0):
                                                    number + 1])
        for word, allowed, instead in WORDS:
            found = re.search(word, line, 0 if "kMGT" in word else re.I)
            if found and not (allowed and re.search(allowed, near)):
                wrong.append(f"{path}:{number}: '{found.group(0)}', "
                             f"write: {instead}")


def is_program(path, first):
    return path.endswith(tree.PROGRAM_SUFFIXES) or first.startswith("#!") or \
        path.endswith("CMakeLists.txt")


def main():
    wrong, count = [], 0
    for path in tree.files(SOURCE):
        text = tree.lines(SOURCE, path)
        count += 1
        if text and is_program(path, text[0][1]) and \
                not any(LICENCE in line for _, line in text[:3]):
            wrong.append(f"{path}: no line '{LICENCE}'")
        if not SKIPPED.fullmatch(path):
            check_words(path, wrong)
    print(f"{count} files")
    print("\n".join(wrong))
    return 1 if wrong or count < 100 else 0


if __name__ == "__main__":
    sys.exit(main())
