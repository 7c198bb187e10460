# SPDX-License-Identifier: GPL-3.0-or-later
"""Hold the table of messages in DEVELOPERS.md to the code:
wire.py [--print] SOURCE.

Message names, member names, types and limits are taken from the tables of
agent/shared/wire.c, the columns of rows from wire_rows.c, the states and
their limits from the lists of the two machines.  A message and a member must
each stand in DEVELOPERS.md as the row that --print prints, a state as `NAME`,
or `NAME ms` where it has a limit.
"""
import pathlib
import re
import sys

SOURCE = pathlib.Path(sys.argv[-1]).resolve()
HEADERS = [SOURCE / "include" / name
           for name in ("wire.h", "trial.h", "measurement.h")]
INTEGER_MAX = 2 ** 53 - 1


def constants():
    """Whole numbers that the headers define."""
    table = {}
    for path in HEADERS:
        for name, text in re.findall(r"^#define (\w+) (.+?)(?:\s*/\*.*)?$",
                                     path.read_text(), re.M):
            try:
                table[name] = number(text, table)
            except ValueError:
                pass		# no number
    return table


def number(text, known):
    """Value of an expression of whole numbers and known names."""
    text = re.sub(r"UINT64_C\((\d+)\)", r"\1", text)
    text = re.sub(r"[A-Z_][A-Z0-9_]*",
                  lambda word: str(known.get(word.group(0), "?")), text)
    if not re.fullmatch(r"[\d\s+*()<-]+", text):
        raise ValueError(text)
    return eval(text, {"__builtins__": {}})


def text_sizes(known):
    """{(struct, member): capacity of a text, its NUL included}."""
    sizes = {}
    for path in HEADERS:
        for name, body in re.findall(r"^struct (\w+) \{(.*?)^\};",
                                     path.read_text(), re.M | re.S):
            for member, size in re.findall(r"\bchar (\w+)\[([^\]]+)\];", body):
                sizes[name, member] = number(size, known)
    return sizes


def integer(low, high, known, word="integer"):
    low, high = number(low, known), number(high, known) or INTEGER_MAX
    top = "" if high == INTEGER_MAX else str(high)
    return f"{word} {low}..{top}"


def sample_members():
    text = (SOURCE / "include/measurement.h").read_text()
    block = re.search(r"#define TCP_SAMPLE_FIELDS(.*?)\n\n", text, re.S)
    return re.findall(r"X\((\w+), \d+, \d+\)", block.group(1))


def type_of(kind, words, known, sizes):
    """What the table says of a member, from its macro's arguments."""
    if kind == "U64":
        return integer(words[2], words[3], known)
    if kind == "U64_OPTIONAL":
        return integer("0", words[2], known, "optional integer")
    if kind == "TEXT":
        return f"text ≤ {sizes[words[0], words[1]] - 1}"
    return {"U64_NULL": "integer or null", "BOOL": "boolean", "NAME": "name",
            "OBJECT": "object"}[kind]


def tables(text, known, sizes):
    """{table: [(member, type, table of an object)]} of wire.c."""
    found = {}
    for name, body in re.findall(
            r"^static const struct wire_member (\w+)\[\] = \{(.*?)^\};", text,
            re.M | re.S):
        rows = []
        for call in re.finditer(r"\b([A-Z]\w*)\(([^\"]*?)(?:\"|\))|"
                                r"\.name = \"(\w+)\"", body):
            kind, member = call.group(1), call.group(3)
            if member:
                rows.append((member, "integer 0..", None))
            elif kind == "TOKENS":
                rows.append(("tokens", "tokens", None))
            elif kind == "TCP_SAMPLE_FIELDS":
                rows += [(m, "integer or null", None)
                         for m in sample_members()]
            else:
                words = [word.strip() for word in call.group(2).split(",")]
                rows.append((words[1], type_of(kind, words, known, sizes),
                             words[2] if kind == "OBJECT" else None))
        found[name] = rows
    return found


def members(table, all_tables, prefix=""):
    for name, kind, inner in all_tables[table]:
        yield prefix + name, kind
        # The members of TCP_INFO are listed once, with the rows.
        if inner and inner != "sample_members":
            yield from members(inner, all_tables, prefix + name + ".")


def wanted():
    """[(message, member, type)]; member "" for the message itself."""
    text = (SOURCE / "agent/shared/wire.c").read_text()
    known = constants()
    found = tables(text, known, text_sizes(known))
    rows = []
    for message, request, table in re.findall(
            r"\[WIRE_\w+\] = \{ \"([a-z-]+)\", (true|false),\s*(\w+)",
            text):
        rows.append((message, "",
                     "request" if request == "true" else "report"))
        if table != "NULL":
            rows += [(message, *row) for row in members(table, found)]
    return rows


def states():
    """"NAME ms" of both machines."""
    for path in ("agent/session_state.h", "controller/conduct/link_state.h"):
        text = (SOURCE / path).read_text()
        block = re.search(r"_STATES\(X\)(.*?)\n#define", text, re.S).group(1)
        for name, limit in re.findall(r"X\((\w+), (\d+)\)", block):
            yield name if limit == "0" else f"{name} {limit}"


def columns():
    """Columns of the two tables of rows."""
    text = (SOURCE / "agent/shared/wire_rows.c").read_text()
    names = re.findall(r"_columns\[\] = \{(.*?)\}", text, re.S)
    return [word for block in names for word in re.findall(r"\"(\w+)\"",
                                                           block)] \
        + sample_members()


def line_of(message, member, kind):
    return f"| `{message}` | `{member}` | {kind} |" if member else \
        f"| `{message}` | | {kind} |"


def main():
    rows = wanted()
    if "--print" in sys.argv:
        for row in rows:
            print(line_of(*row), "|")
        return 0
    text = (SOURCE / "DEVELOPERS.md").read_text()
    wrong = []
    for row in rows:
        if line_of(*row) not in text:
            wrong.append(f"DEVELOPERS.md lacks the row: {line_of(*row)}")
    for message, member in re.findall(r"^\| `([a-z-]+)` \| `([\w.]+)` \|",
                                      text, re.M):
        if (message, member) not in {row[:2] for row in rows}:
            wrong.append(f"DEVELOPERS.md has a row of no member: {message} "
                         f"{member}")
    for column in columns():
        if f"`{column}`" not in text:
            wrong.append(f"DEVELOPERS.md lacks the column `{column}`")
    for state in states():
        if not re.search(rf"\b{state}\b", text):
            wrong.append(f"DEVELOPERS.md lacks the state {state}")
    print(f"{len(rows)} rows of {len({row[0] for row in rows})} messages")
    print("\n".join(wrong))
    return 1 if wrong or len(rows) < 50 else 0


if __name__ == "__main__":
    sys.exit(main())
