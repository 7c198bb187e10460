# SPDX-License-Identifier: GPL-3.0-or-later
"""Walks the files of the project for the other scripts here."""
import os

PROGRAM_SUFFIXES = (".c", ".h", ".py", ".sh")


def files(source):
    """Paths of all files but those of builds and of version control."""
    for folder, folders, names in os.walk(source):
        folders[:] = sorted(name for name in folders
                            if name not in (".git", "__pycache__")
                            and not name.startswith("build"))
        for name in sorted(names):
            path = os.path.join(folder, name)
            if os.path.isfile(path) and not os.path.islink(path):
                yield os.path.relpath(path, source)


def lines(source, path):
    """Numbered lines; a file that is no UTF-8 text has none."""
    with open(os.path.join(source, path), "rb") as file:
        content = file.read()
    try:
        text = content.decode()
    except UnicodeDecodeError:
        return []
    return list(enumerate(text.split("\n"), 1)) if "\0" not in text else []
