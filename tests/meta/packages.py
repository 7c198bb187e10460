# SPDX-License-Identifier: GPL-3.0-or-later
"""Hold tests/packages to the truth: packages.py SOURCE BUILD.

What the build links (NEEDED of every program), what CMake asks pkg-config for
and what the scripts and tests call must come from a declared package, from
one that a declared package depends on, or from an essential one.  And every
declared package must be called for by something.
"""
import ast
import os
import pathlib
import re
import shutil
import subprocess
import sys

os.environ["PATH"] = "/usr/sbin:/usr/bin:/sbin:/bin"
SOURCE, BUILD = (pathlib.Path(word).resolve() for word in sys.argv[1:3])
SHELL_SCRIPTS = ("controller/quickstart", "tests/run", "tests/install",
                 "tests/prove-packages", "tests/bench/run", "tests/fuzz/run",
                 ".ci/run")
# May be absent, and the script says so: sudo is only used where it is.
OPTIONAL = {"sudo"}
# Tools that the build calls by itself, and the package that has the headers
# that every C file sees.
IMPLIED = {"gcc": "/usr/bin/gcc", "ninja": "/usr/bin/ninja",
           "pkg-config": "/usr/bin/pkg-config",
           "stdio.h": "/usr/include/stdio.h"}
PYTHON_MODULES = pathlib.Path("/usr/lib/python3/dist-packages")
WORD = r"[A-Za-z0-9_./-]+"


def output(*argv):
    return subprocess.run(argv, text=True, capture_output=True).stdout


def declared():
    """{package: groups} of tests/packages."""
    rows = {}
    for line in (SOURCE / "tests/packages").read_text().splitlines():
        if line and not line.startswith("#"):
            groups, package = line.split()[:2]
            rows[package] = groups.split(",")
    return rows


def installed():
    """{name: (depends, essential)}; names of `Provides` count too."""
    form = ("${Package}\t${Pre-Depends}, ${Depends}\t${Essential}\t"
            "${Provides}\n")
    table = {}
    for line in output("dpkg-query", "-W", "-f", form).splitlines():
        name, depends, essential, provides = line.split("\t")
        row = (name, names_of(depends), essential == "yes")
        for key in [name] + names_of(provides):
            table.setdefault(key, row)
    return table


def names_of(text):
    """Package names of a dependency field, without versions."""
    words = re.split(r"[,|]", text)
    return [re.sub(r"[ :(].*", "", word.strip()) for word in words
            if word.strip()]


def closure(roots, table):
    """Everything that comes along with these packages."""
    seen, todo = set(), list(roots)
    while todo:
        name = todo.pop()
        if name in table and table[name][0] not in seen:
            seen.add(table[name][0])
            todo += table[name][1]
    return seen


def forms_of(path):
    """A path as a package may have it: /bin may be a link to /usr/bin."""
    forms = {str(path), os.path.realpath(path)}
    forms |= {form.replace("/usr/", "/", 1) for form in forms}
    return sorted(forms | {"/usr" + form for form in forms})


def owners(paths):
    """{path: package} of files; asks dpkg once, for it reads all its lists
    each time."""
    wanted = sorted({form for path in paths for form in forms_of(path)})
    known = {}
    for line in output("dpkg", "-S", *wanted).splitlines():
        found = re.match(r"([^\s:,]+)(?::\S+)?: (/.*)", line)
        if found and not line.startswith("diversion "):
            known[found.group(2)] = found.group(1)
    return {path: next((known[form] for form in forms_of(path)
                        if form in known), None) for path in paths}


def linked():
    """(program, library path) of every program that was built."""
    for program in sorted(BUILD.rglob("*")):
        if not program.is_file() or not os.access(program, os.X_OK) or \
                "CMakeFiles" in program.parts or program.suffix == ".so":
            continue
        for name, path in re.findall(r"^\s*(\S+) => (/\S+)",
                                     output("ldd", str(program)), re.M):
            yield f"{program.name} links {name}", path


def asked_of_pkg_config():
    text = "".join(path.read_text()
                   for path in [SOURCE / "CMakeLists.txt"]
                   + sorted(SOURCE.glob("tests/**/CMakeLists.txt")))
    for call in re.findall(r"pkg_check_modules\(\w+([^)]*)\)", text):
        for module in call.split():
            if module in ("REQUIRED", "IMPORTED_TARGET", "QUIET"):
                continue
            module = re.split("[<>=]", module)[0]
            folder = output("pkg-config", "--variable=pcfiledir", module)
            yield f"CMake asks for {module}", \
                f"{folder.strip()}/{module}.pc"


def shell_words(text):
    """Words in the place of a command of a shell script."""
    text = re.sub(r"^\s*#.*$", "", text, flags=re.M)
    text = text.replace("\\\n", " ")
    # No command is inside single quotes; an apostrophe may be inside double
    # quotes.
    text = re.sub(r"'[^']*'|\"(?:\\.|[^\"\\])*\"",
                  lambda found: "''" if found.group(0)[0] == "'"
                  else found.group(0), text)
    opening = (r"(?:^|[;|&({]|\$\(|\b(?:if|then|do|else|elif|while|until|"
               r"exec|sudo|!|command -v|--)\s)\s*")
    assignment = r"(?:[A-Za-z_]\w*=(?:\"[^\"]*\"|[^\s;]*)\s+)*"
    return set(re.findall(opening + assignment + f"({WORD})", text, re.M))


def python_words(text):
    """First strings of lists and of calls: commands in Python tests."""
    words = set()
    for node in ast.walk(ast.parse(text)):
        first = None
        if isinstance(node, (ast.List, ast.Tuple)) and node.elts:
            first = node.elts[0]
        elif isinstance(node, ast.Call) and node.args and \
                getattr(node.func, "attr", "") == "run":
            first = node.args[0]
        if isinstance(first, ast.Constant) and isinstance(first.value, str):
            words.add(first.value)
    return words


def commands():
    """(what calls, path) of every command that is called."""
    scripts = {SOURCE / name: shell_words for name in SHELL_SCRIPTS}
    for path in SOURCE.glob("tests/**/*.py"):
        scripts[path] = python_words
    for path in (SOURCE / "tests/bench").iterdir():
        if path not in scripts and path.is_file() and \
                path.read_text().startswith("#!/usr/bin/python3"):
            scripts[path] = python_words
    for path, words_of in sorted(scripts.items()):
        text = path.read_text()
        words = words_of(text)
        shebang = re.match(r"#!(\S+)", text)
        if shebang:
            words.add(shebang.group(1))
        for word in sorted(words - OPTIONAL):
            found = shutil.which(word) if "/" not in word or \
                word.startswith("/usr/bin") else None
            if found:
                yield f"{path.relative_to(SOURCE)} calls {word}", found


def modules():
    """(what imports, path) of every Python module that is neither Python's own
    nor a file of the tests."""
    own = {path.stem for path in SOURCE.glob("tests/**/*.py")}
    for path in sorted(SOURCE.glob("tests/**/*.py")):
        for node in ast.walk(ast.parse(path.read_text())):
            names = [alias.name for alias in node.names] \
                if isinstance(node, ast.Import) else \
                [node.module] if isinstance(node, ast.ImportFrom) else []
            for name in {name.partition(".")[0] for name in names}:
                if name not in own | sys.stdlib_module_names:
                    yield f"{path.relative_to(SOURCE)} imports {name}", \
                        str(PYTHON_MODULES / name)


def of_clang():
    """clang and libFuzzer, where they are there: tests/run needs neither."""
    if shutil.which("clang"):
        yield "tests/fuzz/run builds with clang", shutil.which("clang")
        runtime = pathlib.Path(output("clang", "--print-runtime-dir").strip())
        for path in runtime.glob("libclang_rt.fuzzer-*.a"):
            yield "clang links libFuzzer", str(path)


def main():
    table, rows = installed(), declared()
    everything = closure(rows, table)
    essential = closure([name for name, row in table.items() if row[2]],
                        table) | {"apt", "dpkg"}
    wrong, used = [], set()
    uses = list(linked()) + list(asked_of_pkg_config()) + list(commands()) \
        + list(modules()) + list(of_clang()) \
        + [(f"{name} is needed", path) for name, path in IMPLIED.items()]
    owner = owners({path for _, path in uses})
    for what, path in uses:
        package = owner[path]
        used.add(package)
        if package is None:
            wrong.append(f"{what}: no package has {path}")
        elif package not in everything | essential:
            wrong.append(f"{what}: {package} is not in tests/packages")
    for package in rows:
        # python3 has its program from a package that it depends on.
        if package in table and not used & {
                table[package][0], *table[package][1]} - essential:
            wrong.append(f"{package} is in tests/packages, but nothing found "
                         "calls for it")
    print(f"{len(uses)} uses of {len(used)} packages")
    print("\n".join(wrong))
    return 1 if wrong or len(uses) < 20 else 0


if __name__ == "__main__":
    sys.exit(main())
