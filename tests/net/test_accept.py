# SPDX-License-Identifier: GPL-3.0-or-later
"""`plafond accept` with real agents, where everything is in order.

The link is shaped by tbf, which counts a packet with the 14 bytes of its
Ethernet header: of 1514 bytes 1448 are payload over IPv4 and 1428 over IPv6
(RFC 9293, RFC 7323: 20 bytes TCP, 12 bytes timestamps).
"""
import math

import harness

UNDECIDED = 2		# one trial alone decides nothing
EXAMPLE = harness.SOURCE / "controller/examples/host.yaml"


def near(found_bps, rate_bps, payload_bytes):
    """tbf's rate is an upper limit: a burst adds 1 % of one second's bytes at
    the very most.  Below it a slow machine may stay, but not at nothing."""
    ceiling_bps = rate_bps * payload_bytes / 1514
    assert 0.3 * ceiling_bps < found_bps < 1.01 * ceiling_bps, \
        f"{found_bps} bit/s, expected about {ceiling_bps:.0f}"


def test_embedded_pair_over_loopback():  # alone
    with harness.bed() as bed:
        record = bed.accept(EXAMPLE, "--set", "plan.trials=1",
                            "--set", "plan.duration=1 s")
        assert record["trials"], "no trial in the record"
        for trial in record["trials"]:
            assert trial["payload_bps"] > 0
        # A reference is never a ceiling: validity only, whatever the rate.
        assert not [row for row in record["criteria"] if row["judged"]]
        assert bed.kept_records()[-1]["id"] == record["id"]


def test_good_link_meets_both_directions():
    with harness.shaped_bed() as bed:
        record = bed.accept(bed.declaration(plan={
            "trials": 7, "directions": ["a-to-b", "b-to-a"]}), status=0)
        assert len(record["trials"]) == 14
        for trial in record["trials"]:
            near(trial["payload_bps"], 20_000_000, 1448)
        for ceiling in record["ceilings"]:
            assert ceiling["payload_bps"] == 20_000_000 * 1448 // 1514
        assert bed.kept_records()[-1]["id"] == record["id"]


def test_slow_link_falls_short():
    with harness.shaped_bed(rate_bps=10_000_000) as bed:
        record = bed.accept(bed.declaration(plan={"trials": 7}), status=1)
        ceiling_bps = record["ceilings"][0]["payload_bps"]
        missing_bps = sum(entry["bps"] for entry in record["ledger"]
                          if entry["direction"] == "a-to-b")
        # The other link was half as fast: about half is to be explained.
        assert 0.4 * ceiling_bps < missing_bps < 0.8 * ceiling_bps


def test_one_trial_decides_nothing():
    with harness.shaped_bed() as bed:
        record = bed.accept(bed.declaration(), status=UNDECIDED)
        assert record["verdict"]["reasons"]


def test_ipv6():
    with harness.shaped_bed(six=True) as bed:
        record = bed.accept(bed.declaration(six=True), status=UNDECIDED)
        near(record["trials"][0]["payload_bps"], 20_000_000, 1428)


def test_far_end_opens_the_connections():
    with harness.shaped_bed() as bed:
        record = bed.accept(bed.declaration(plan={
            "opens": "b", "directions": ["a-to-b", "b-to-a"]}),
            status=UNDECIDED)
        assert [trial["direction"] for trial in record["trials"]] == \
            ["a-to-b", "b-to-a"]
        for trial in record["trials"]:
            near(trial["payload_bps"], 20_000_000, 1448)


def test_both_directions_at_once():
    with harness.shaped_bed() as bed:
        record = bed.accept(bed.declaration(plan={"directions": ["both"]}),
                            status=UNDECIDED)
        assert record["trials"][0]["direction"] == "both"
        # Acknowledgements of 66 bytes, one for 2 segments (RFC 9293) to 45
        # (64 KiB of receive offload), take from frames of 1514: 2.1 to 0.1 %.
        for way, ceiling in zip(record["trials"][0]["directions"],
                                record["ceilings"]):
            share = way["ceiling_payload_bps"] / ceiling["payload_bps"]
            assert 1514 / (1514 + 66) <= share < 1, way
            # What a stall holds back of the settle time may come in the
            # window, so the result itself has no bound here.
            assert math.isclose(way["attained"], way["payload_bps"] /
                                way["ceiling_payload_bps"],
                                rel_tol=1e-6), way


def test_sixteen_streams():
    with harness.shaped_bed() as bed:
        record = bed.accept(bed.declaration(plan={"streams": 16}),
                            status=UNDECIDED)
        trial = record["trials"][0]
        assert trial["streams"] == 16
        near(trial["payload_bps"], 20_000_000, 1448)


def test_most_streams_there_are():
    # 256 initial windows of ten packets (RFC 6928) find room in the queue:
    # 3.9 MB are 0.31 s.
    with harness.shaped_bed(rate_bps=100_000_000, queue_s=0.4) as bed:
        record = bed.accept(bed.declaration(
            service=harness.service(100), plan={"streams": 256}),
            status=UNDECIDED)
        assert record["trials"][0]["streams"] == 256


def test_record_goes_to_a_file_and_text_to_the_terminal():
    with harness.shaped_bed() as bed:
        path = bed.folder / "record.json"
        process = bed.controller("accept", "--format", "json", "-o", path,
                                 bed.declaration())
        assert process.wait() == UNDECIDED, process.tail()
        assert process.stdout == ""
        text = path.read_text()
        harness.check_record(harness.json.loads(text))


def test_text_report_names_ceiling_and_verdict():
    with harness.shaped_bed() as bed:
        process = bed.controller("accept", bed.declaration())
        assert process.wait() == UNDECIDED, process.tail()
        for word in ("LINK-01", "ceiling", "undecided", "a-to-b"):
            assert word in process.stdout, process.tail()
        # In a pipe there is no live line and no colour.
        assert "\x1b" not in process.stdout + process.stderr
        assert "\r" not in process.stdout + process.stderr


def test_ready_says_what_it_found():
    with harness.shaped_bed() as bed:
        process = bed.controller("ready", bed.declaration())
        assert process.wait() == 0, process.tail()
        for word in ("quay", "mast", "1500"):
            assert word in process.stdout, process.tail()
