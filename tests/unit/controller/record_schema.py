#!/usr/bin/python3
# SPDX-License-Identifier: GPL-3.0-or-later
"""Hold records to the schema with a validator of the trade.

record_schema.py SCHEMA RECORD...: 0 all valid and every spoilt copy refused,
1 otherwise, 77 without the validator (Debian: python3-jsonschema).
"""
import copy
import json
import sys

try:
    from jsonschema import Draft202012Validator
except ImportError:
    sys.exit(77)


def places(value, path=()):
    """Every object in a record, with the way to it."""
    if isinstance(value, dict):
        yield path
        for key, item in value.items():
            yield from places(item, path + (key,))
    elif isinstance(value, list):
        for index, item in enumerate(value):
            yield from places(item, path + (index,))


def at(value, path):
    for step in path:
        value = value[step]
    return value


def shortened(record):
    """One trial of each form, so that the copies are quick to look at."""
    record = copy.deepcopy(record)
    record["trials"] = [record["trials"][0], record["trials"][-1]]
    for way in [record["trials"][0], *record["trials"][1]["directions"]]:
        del way["series"]["buckets"][2:]
    return record


def spoilt(record):
    """Copies that must be refused: a name missing, unknown, of a wrong type."""
    seen = set()
    for path in places(record):
        # One of each kind of object is enough.
        kind = tuple(step for step in path if isinstance(step, str))
        if kind in seen:
            continue
        seen.add(kind)
        for name in at(record, path):
            wrong = copy.deepcopy(record)
            del at(wrong, path)[name]
            yield path + (name, "missing"), wrong
            wrong = copy.deepcopy(record)
            at(wrong, path)[name] = {"unit": "furlong"}
            yield path + (name, "of another type"), wrong
        wrong = copy.deepcopy(record)
        at(wrong, path)["speed"] = 1
        yield path + ("unknown name",), wrong


def also_spoilt(record):
    wrong = copy.deepcopy(record)
    wrong["verdict"]["outcome"] = "pass"
    yield "an outcome that is no word of ours", wrong
    wrong = copy.deepcopy(record)
    wrong["verdict"]["outcome"] = "void"
    wrong["verdict"]["reasons"] = []
    yield "void without a reason", wrong
    wrong = copy.deepcopy(record)
    wrong["ledger"] = [dict(direction="both", name="x", bps=1,
                            uncertainty_bps=0, evidence="x")]
    yield "a ledger of both directions", wrong
    wrong = copy.deepcopy(record)
    wrong["trials"][0]["payload_bps"] = -1
    yield "a negative rate", wrong
    wrong = copy.deepcopy(record)
    wrong["trials"][0]["payload_bps"] = 1.5
    yield "a rate that is not whole", wrong
    wrong = copy.deepcopy(record)
    wrong["trials"][0]["payload_bps"] = 2 ** 53
    yield "a number that I-JSON does not hold", wrong
    wrong = copy.deepcopy(record)
    wrong["trials"][0]["series"]["buckets"] = [[1, 2]]
    yield "a bucket of two numbers", wrong
    wrong = copy.deepcopy(record)
    wrong["started_utc"] = "yesterday"
    yield "a time that is none", wrong
    wrong = copy.deepcopy(record)
    wrong["id"] = "017f22e2-79b0-4cc3-98c4-dc0c0c07398f"
    yield "an id of another version", wrong
    wrong = copy.deepcopy(record)
    wrong["ceilings"].pop()
    yield "one ceiling", wrong


def main():
    with open(sys.argv[1], encoding="utf-8") as file:
        schema = json.load(file)
    Draft202012Validator.check_schema(schema)
    validator = Draft202012Validator(schema)
    wrong = 0
    for name in sys.argv[2:]:
        with open(name, encoding="utf-8") as file:
            record = json.load(file)
        for error in validator.iter_errors(record):
            print(name, list(error.path), error.message[:400])
            wrong += 1
    record = shortened(record)
    for what, copied in [*spoilt(record), *also_spoilt(record)]:
        if validator.is_valid(copied):
            print("not refused:", what)
            wrong += 1
    return 1 if wrong > 0 else 0


sys.exit(main())
