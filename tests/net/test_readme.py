# SPDX-License-Identifier: GPL-3.0-or-later
"""What README.md shows is what the programs take."""
import re
import subprocess

import harness

README = harness.SOURCE / "README.md"


def blocks(language):
    """Fenced blocks of the README, with digests in full."""
    text = README.read_text()
    found = re.findall(rf"^```{language}\n(.*?)^```", text, re.M | re.S)
    digest = re.compile(r"sha256:([0-9a-f]{4})…")
    return [digest.sub(lambda short: "sha256:" + short.group(1) * 16, block)
            for block in found]


def only(kind, text):
    """The one block of YAML in which a line begins with this."""
    found = [block for block in blocks("yaml")
             if re.search(rf"^{text}", block, re.M)]
    assert len(found) == 1, f"{len(found)} blocks with a {kind}"
    return found[0]


@harness.plain
def test_declaration_has_a_ceiling():
    with harness.bed() as bed:
        path = bed.folder / "harbour-04.yaml"
        path.write_text(only("declaration", "circuit:"))
        process = bed.controller("ceiling", path)
        assert process.wait() == 0, process.tail()


def test_policy_is_taken():
    with harness.bed() as bed:
        bed.link()
        path = bed.folder / "agent.yaml"
        path.write_text(only("policy", "name:") + only("call", "calls:"))
        process = bed.a.start([harness.AGENT, "--policy", path, "--state",
                               bed.folder / "state"], "agent")
        harness.wait_for(lambda: " listening " in process.stderr or
                         not process.running(), "the agent to listen")
        process.signal(harness.signal.SIGTERM)
        assert process.wait() == 0, process.tail()


def help_of(*argv):
    return subprocess.run([str(word) for word in argv], text=True,
                          capture_output=True, check=True,
                          env=harness.environment()).stdout


@harness.plain
def test_commands_and_options_are_known():
    text = README.read_text()
    pages = help_of(harness.CONTROLLER, "--help")
    for command in sorted(set(re.findall(r"`plafond ([a-z]+)", text)
                              + re.findall(r"^you\$ +plafond ([a-z]+)", text,
                                           re.M))):
        assert re.search(rf"^\s+{command}\b", pages, re.M), command
        pages += help_of(harness.CONTROLLER, command, "--help")
    pages += help_of(harness.AGENT, "--help")
    scripts = "".join((harness.SOURCE / name).read_text() for name in (
        "controller/quickstart", "tests/run", "tests/prove-packages"))
    for option in sorted(set(re.findall(r"(?<![\w-])--[a-z][a-z-]+", text))):
        if option == "--install":
            continue	# cmake's
        assert option in pages + scripts, option
