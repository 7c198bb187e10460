# SPDX-License-Identifier: GPL-3.0-or-later
"""The ceiling's bytes per packet against the bytes that really cross a veth,
as tshark and the kernel's interface counters see them.

A capture has a frame without FCS, preamble, SFD and gap: 4 + 8 + 12 = 24 bytes
less than the line carries (IEEE 802.3; RFC 2544 appendix B for the gap).
"""
import collections
import contextlib
import json
import signal
import socket
import time

import harness

UNDECIDED = 2
OUTSIDE_CAPTURE_BYTES = 24
DISCARD_PORT = 9	# RFC 863


def quiet(host, other_address, other_mac):
    """No packet but the test's own: no IPv6, no ARP."""
    host.run("sh", "-c",
             "echo 1 >/proc/sys/net/ipv6/conf/all/disable_ipv6")
    host.run("ip", "neighbour", "replace", other_address, "lladdr", other_mac,
             "nud", "permanent", "dev", "wire")


def mac(host):
    return json.loads(host.run("ip", "-json", "link", "show",
                               "wire"))[0]["address"]


def captured(path):
    """Is there more in the file than the 24 bytes of a pcap header?"""
    return path.exists() and path.stat().st_size > 24


def begin_capture(bed, path):
    """tshark on what comes in at host b; returns when it captures, which it
    shows by datagrams to the discard port that appear in the file."""
    watcher = bed.b.start(
        ["tshark", "-i", "wire", "-p", "-Q", "-s", "128", "-B", "64",
         "-f", "inbound", "-F", "pcap", "-w", path], "tshark")
    with bed.a.inside():
        marker = socket.socket(socket.AF_INET, socket.SOCK_DGRAM)
    with marker:
        def knock():
            with contextlib.suppress(ConnectionRefusedError):
                marker.sendto(b"marker", (harness.B4, DISCARD_PORT))
            return captured(path) or not watcher.running()
        harness.wait_for(knock, "the capture to begin")
    assert watcher.running(), watcher.tail()
    return watcher


def still(host):
    """The counter, once nothing has come in for half a second."""
    last = -1
    while last != host.counter_bytes("wire", "rx"):
        last = host.counter_bytes("wire", "rx")
        time.sleep(0.5)
    return last


def capture(bed, declaration):
    """Run one trial under tshark at host b.  (frame, TCP payload, port) of
    every packet that came in, and the counter's growth meanwhile."""
    path = bed.folder / "capture"
    watcher = begin_capture(bed, path)
    before = still(bed.b)
    bed.accept(declaration, status=UNDECIDED)
    after = still(bed.b)
    watcher.signal(signal.SIGINT)
    watcher.wait()
    text = harness.run(["tshark", "-r", path, "-Y", "tcp", "-T", "fields",
                        "-e", "frame.len", "-e", "tcp.len",
                        "-e", "tcp.dstport"])
    rows = [line.split("\t") for line in text.splitlines()]
    return [(int(row[0]), int(row[1]), int(row[2])) for row in rows], \
        after - before


def ceiling_of(bed, declaration):
    """What `plafond ceiling --format json` says."""
    process = bed.controller("ceiling", "--format", "json", declaration)
    assert process.wait() == 0, process.tail()
    return json.loads(process.stdout)


def test_bytes_on_a_veth_are_the_ceilings():
    with harness.bed() as bed:
        bed.link()
        bed.offloads_off()
        bed.shape(10_000_000)
        quiet(bed.a, harness.B4, mac(bed.b))
        quiet(bed.b, harness.A4, mac(bed.a))
        bed.start_agents()
        declaration = bed.declaration(service=harness.service(10))
        packets, counted_bytes = capture(bed, declaration)
        assert sum(row[0] for row in packets) == counted_bytes, \
            "the capture and the kernel's counter disagree"
        data = collections.Counter(
            (size, payload) for size, payload, port in packets
            if port == harness.DATA_PORT and payload)
        (size, payload), _ = data.most_common(1)[0]
        assert (size, payload) == (1514, 1448)
        full = sum(count for key, count in data.items()
                   if key == (1514, 1448))
        assert full / sum(data.values()) > 0.95, data
        compare(ceiling_of(bed, declaration), size, payload)


def compare(document, size, payload):
    expected = {"line": size + OUTSIDE_CAPTURE_BYTES, "frame": size + 4,
                "packet": size - 14, "segment": size - 34,
                "payload": payload}
    for ceiling in document["ceilings"]:
        found = {level["level"]: level["bytes"]
                 for level in ceiling["levels"] if level["level"] in expected}
        assert found == expected, (found, expected)
