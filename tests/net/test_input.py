# SPDX-License-Identifier: GPL-3.0-or-later
"""Bad input: the message names file, line, column, field, what was found and
what is allowed, and the status is the one of sysexits."""
import json
import subprocess

import harness

GOOD = """circuit: LINK-01
medium: { kind: ethernet, line-rate: 1 Gbit/s }
layers: [ ethernet, ipv4, tcp ]
mtu: 1500 B
"""


def ceiling(text, status, says, *options):
    with harness.bed() as bed:
        path = bed.folder / "circuit.yaml"
        path.write_text(text)
        message = bed.refused("ceiling", *options, path, status=status,
                              says=says)
        lines = 2 if status == 64 else 1	# where help is
        assert len(message.strip().splitlines()) == lines, message


@harness.plain
def test_good_declaration_has_a_ceiling():
    with harness.bed() as bed:
        path = bed.folder / "circuit.yaml"
        path.write_text(GOOD)
        process = bed.controller("ceiling", path)
        assert process.wait() == 0, process.tail()
        # 1448/1538 of 1 Gbit/s, as RFC 6349 section 4.1.1 counts Ethernet
        assert "941.48" in process.stdout, process.tail()


@harness.plain
def test_unknown_field_names_the_nearest():
    ceiling(GOOD + "layerz: [ ethernet ]\n", 65,
            [r"circuit\.yaml:5:\d+", "layerz", "layers"])


@harness.plain
def test_unknown_medium_names_the_nearest():
    ceiling(GOOD.replace("kind: ethernet", "kind: etherne"), 65,
            [r"circuit\.yaml:2:\d+", "etherne", "ethernet"])


@harness.plain
def test_unknown_layer_names_the_nearest():
    ceiling(GOOD.replace("ipv4", "ipv5"), 65,
            [r"circuit\.yaml:3:\d+", "ipv5", "ipv4"])


@harness.plain
def test_bad_unit():
    ceiling(GOOD.replace("Gbit/s", "Gbits"), 65,
            [r"circuit\.yaml:2:\d+", "line-rate", "Gbits"])


@harness.plain
def test_missing_unit():
    ceiling(GOOD.replace("1500 B", "1500"), 65,
            [r"circuit\.yaml:4:\d+", "mtu", "1500", "unit"])


@harness.plain
def test_negative_rate():
    ceiling(GOOD.replace("1 Gbit/s", "-1 Gbit/s"), 65,
            [r"circuit\.yaml:2:\d+", "line-rate", "-1 Gbit/s", "sign"])


@harness.plain
def test_layers_that_do_not_fit_in_the_mtu():
    ceiling(GOOD.replace("1500 B", "50 B"), 65, ["50", "mtu|MTU"])


@harness.plain
def test_impossible_stack():
    ceiling(GOOD.replace("[ ethernet, ipv4, tcp ]",
                         "[ ethernet, tcp, ipv4 ]"), 65,
            [r"circuit\.yaml:3:\d+", "tcp"])


@harness.plain
def test_duplicate_field():
    ceiling(GOOD + "mtu: 1400 B\n", 65, [r"circuit\.yaml:5:\d+", "mtu"])


@harness.plain
def test_anchor_is_refused():
    ceiling(GOOD.replace("1500 B", "&x 1500 B"), 65, [r"circuit\.yaml:4:"])


@harness.plain
def test_second_document_is_refused():
    ceiling(GOOD + "---\n" + GOOD, 65, ["document"])


@harness.plain
def test_empty_file():
    ceiling("", 65, [r"circuit\.yaml"])


@harness.plain
def test_broken_yaml():
    ceiling("circuit: [\n", 65, [r"circuit\.yaml:\d+:\d+"])


@harness.plain
def test_binary_file():
    with harness.bed() as bed:
        path = bed.folder / "circuit.yaml"
        path.write_bytes(bytes(range(256)) * 16)
        bed.refused("ceiling", path, status=65, says=[r"circuit\.yaml"])


@harness.plain
def test_overridden_value_is_named_in_its_error():
    ceiling(GOOD, 65, [r"--set", "mtu", "1500 X"], "--set", "mtu=1500 X")


@harness.plain
def test_overridden_value_counts():
    with harness.bed() as bed:
        path = bed.folder / "circuit.yaml"
        path.write_text(GOOD)
        process = bed.controller("ceiling", "--set",
                                 "medium.line-rate=100 Mbit/s", path)
        assert process.wait() == 0, process.tail()
        assert "94.148" in process.stdout or "94.14" in process.stdout, \
            process.tail()


@harness.plain
def test_missing_file():
    with harness.bed() as bed:
        bed.refused("ceiling", bed.folder / "nowhere.yaml", status=66,
                    says=["nowhere.yaml"])


@harness.plain
def test_folder_instead_of_a_file():
    with harness.bed() as bed:
        process = bed.controller("ceiling", bed.folder)
        assert process.wait() in (65, 66, 74), process.tail()


@harness.plain
def test_accept_without_ends():
    with harness.bed() as bed:
        path = bed.folder / "circuit.yaml"
        path.write_text(GOOD)
        bed.refused("accept", path, status=65, says=["ends"])


def usage(argv, says):
    done = subprocess.run([str(word) for word in argv], text=True,
                          capture_output=True, env=harness.environment())
    assert done.returncode == 64, (done.returncode, done.stderr)
    assert done.stdout == ""
    for word in says:
        assert word in done.stderr, done.stderr


@harness.plain
def test_unknown_command():
    usage([harness.CONTROLLER, "ceilling"], ["ceilling", "ceiling"])


@harness.plain
def test_unknown_option():
    usage([harness.CONTROLLER, "ceiling", "--nosuch", "x"], ["--nosuch"])


@harness.plain
def test_missing_argument():
    usage([harness.CONTROLLER, "ceiling"], ["FILE"])


@harness.plain
def test_no_command():
    usage([harness.CONTROLLER], [])


@harness.plain
def test_unknown_option_of_the_agent():
    usage([harness.AGENT, "--nosuch"], ["--nosuch"])


@harness.plain
def test_help_and_version():
    for program in (harness.CONTROLLER, harness.AGENT):
        for option in ("--help", "-h", "--version", "-V"):
            done = subprocess.run([program, option], text=True,
                                  capture_output=True,
                                  env=harness.environment())
            assert done.returncode == 0, (program, option, done.stderr)
            assert done.stdout and not done.stderr, (program, option)


@harness.plain
def test_tables_list_their_rows():
    with harness.bed() as bed:
        for command, words in (("media", ("ethernet", "host")),
                               ("layers", ("ethernet", "vlan", "ipv4", "ipv6",
                                           "tcp", "udp", "tls"))):
            process = bed.controller(command)
            assert process.wait() == 0, process.tail()
            for word in words:
                assert word in process.stdout, process.tail()


@harness.plain
def test_sweep_of_what_is_no_number():
    ceiling(GOOD, 64, ["circuit is a text and cannot be swept"],
            "--sweep", "circuit=a..b")


@harness.plain
def test_sweep_of_an_unknown_field_names_the_nearest():
    ceiling(GOOD, 64, ["mut", "mtu"], "--sweep", "mut=64 B..1500 B")


@harness.plain
def test_sweep_without_a_unit():
    ceiling(GOOD, 64, ["FROM", "'64'", "a size such as"],
            "--sweep", "mtu=64..1500")


@harness.plain
def test_sweep_beyond_what_the_field_allows():
    ceiling(GOOD, 65, ["--sweep mtu", "160000 B"],
            "--sweep", "mtu=1500 B..160000 B")


@harness.plain
def test_sweep_and_packet_sizes_together():
    ceiling(GOOD, 64, ["one of them"], "--packet-sizes",
            "--sweep", "mtu=64 B..1500 B")


@harness.plain
def test_every_view_of_every_example():
    def none(name):
        raise ValueError(name)		# NaN, Infinity

    views = ([], ["--packet-sizes"],
             ["--sweep", "conditions.round-trip=1 ms..100 ms"])
    with harness.bed() as bed:
        for path in sorted((harness.SOURCE
                            / "controller/examples").glob("*.yaml")):
            for view in views:
                for form in ("text", "json", "csv"):
                    process = bed.controller("ceiling", path, *view,
                                             "--format", form)
                    assert process.wait() == 0, process.tail()
                    if form == "json":
                        json.loads(process.stdout, parse_constant=none)


@harness.plain
def test_examples_are_good():
    with harness.bed() as bed:
        for path in sorted((harness.SOURCE
                            / "controller/examples").glob("*.yaml")):
            process = bed.controller("ceiling", path)
            assert process.wait() == 0, process.tail()
