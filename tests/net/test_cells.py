# SPDX-License-Identifier: GPL-3.0-or-later
"""ATM cells and VXLAN as the kernel makes or counts them.

ATM: `tc qdisc ... stab linklayer atm` (iproute2's size table, looked up by the
kernel) counts a packet by the octets of its cells.  It is told the sum of
encapsulation and trailer that the manual tc-stab(8), RFC 2684 and RFC 2364
give, and must count what the program says for the stack of layers.

VXLAN: the kernel of this machine sends TCP through its own VXLAN device; the
frames on the wire must be those of the ladder.
"""
import json
import socket
import tempfile
from fractions import Fraction

import capture
import dissect
import harness
import ladder

LINE_BPS = 24_000_000
ADSL = {"kind": "adsl2plus", "downstream": "24 Mbit/s",
        "upstream": "1 Mbit/s"}
ETHERNET_BYTES = 14		# of the header that the kernel counts too
TBF = ("tbf", "rate", "1gbit", "burst", "1mb", "limit", "1mb")

# (octets with which tc must reckon besides the IP packet, AAL5's trailer
# included; the stack from AAL5 to IP; whence the number)
STACKS = [
    (8, [], "RFC 2684 s6.1: VC multiplexing"),
    (16, ["llc-snap"], "RFC 2684 s5.1: LLC/SNAP"),
    (10, ["ppp"], "tc-stab(8): PPPoA, VC multiplexing"),
    (14, ["llc-ppp", "ppp"], "tc-stab(8): PPPoA, LLC"),
    (24, ["ethernet"], "tc-stab(8): bridged, VC multiplexing"),
    (32, ["llc-snap", "ethernet"], "tc-stab(8): bridged, LLC/SNAP"),
    (32, ["ethernet", "pppoe", "ppp"], "tc-stab(8): PPPoE, VC multiplexing"),
    (40, ["llc-snap", "ethernet", "pppoe", "ppp"], "tc-stab(8): PPPoE, LLC"),
    (28, ["ethernet", "vlan"], "24 and a tag"),
    (44, ["llc-snap", {"ethernet": {"fcs": True}}, "pppoe", "ppp"],
     "tc-stab(8): PPPoE, LLC, and the FCS of RFC 2684 s5.2"),
]


# Sizes between which packets are looked at: from the least of IPv4, and around
# the usual MTUs.
WINDOWS = ((68, 140), (1428, 1500))


def sizes_of(octets):
    """Both sides of each edge of a cell within the windows, and usual MTUs."""
    edges = [48 * cells - octets + more for cells in range(2, 33)
             for more in (0, 1)]
    return sorted({68, 100, 1440, 1492, 1500} | {
        edge for edge in edges
        if any(first <= edge <= last for first, last in WINDOWS)})


def quiet_link(bed):
    """Hosts a and b with a veth between them, on which nothing is sent that we
    do not send: no IPv6, and neighbours that need no ARP."""
    bed.a, bed.b = harness.Host(bed, "a"), harness.Host(bed, "b")
    harness.run(["ip", "link", "add", "wire", "netns", "a", "type", "veth",
                 "peer", "name", "wire", "netns", "b"])
    macs = ("02:00:00:00:00:0a", "02:00:00:00:00:0b")
    for host, address, mac in ((bed.a, harness.A4, macs[0]),
                               (bed.b, harness.B4, macs[1])):
        host.run("ip", "link", "set", "wire", "addrgenmode", "none",
                 "address", mac, "up")
        host.run("ip", "address", "add", f"{address}/24", "dev", "wire")
    for host, address, mac in ((bed.a, harness.B4, macs[1]),
                               (bed.b, harness.A4, macs[0])):
        host.run("ip", "neighbour", "replace", address, "lladdr", mac, "nud",
                 "permanent", "dev", "wire")


def sent_bytes(host):
    with host.inside():
        shown = harness.run(["tc", "-s", "-json", "qdisc", "show", "dev",
                             "wire", "root"])
    return json.loads(shown)[0]["bytes"]


def counted(bed, overhead_bytes, sizes):
    """What tc counts for an IP packet of each size, which it sees with the
    header of Ethernet, and with so many octets more."""
    words = ("root", "stab", "overhead", str(overhead_bytes),
             "linklayer", "atm", "mtu", "2048", "tsize", "2048")
    try:
        bed.a.run("tc", "qdisc", "replace", "dev", "wire", *words, *TBF)
    except AssertionError as error:
        raise harness.Skip(f"no size tables of tc here: {error}") from None
    found = []
    with bed.a.inside():
        sender = socket.socket(socket.AF_INET, socket.SOCK_DGRAM)
    with sender:
        before = sent_bytes(bed.a)
        for size in sizes:
            sender.sendto(bytes(size - 28), (harness.B4, 9))
            after = harness.wait_for(
                lambda: max(sent_bytes(bed.a) - before, 0), "tc to count")
            found.append(after)
            before += after
    bed.a.run("tc", "qdisc", "delete", "dev", "wire", "root")
    return found


def said(layers, sizes):
    """What the program says a packet of each size is on the line: rate of the
    line over that of the packets, in whole octets."""
    declared = {"circuit": "CELLS-01", "medium": ADSL,
                "layers": ["aal5", *layers, "ipv4", "udp"]}
    points = sum(ladder.sweeps(
        [(declared, f"mtu={first} B..{last} B:1 B")
         for first, last in WINDOWS]), [])
    octets = {}
    for point in map(ladder.Point, points):
        exact = Fraction(LINE_BPS * point.number, point.bps("packet"))
        octets[point.number] = round(exact)
        assert abs(exact - round(exact)) < Fraction(1, 1000)
    return [octets[size] for size in sizes]


def test_cells_as_tc_counts_them():
    with harness.bed() as bed:
        quiet_link(bed)
        kernel = {octets: counted(bed, octets - ETHERNET_BYTES,
                                  sizes_of(octets))
                  for octets in sorted({row[0] for row in STACKS})}
    for octets, layers, source in STACKS:
        program = said(layers, sizes_of(octets))
        assert program == kernel[octets], \
            f"{source}: tc {kernel[octets]}, program {program}"
    print(f"{len(STACKS)} stacks, {len(sizes_of(8))} sizes each: equal")


def test_the_manuals_example():
    """tc-stab(8): 100 octets without overhead are 3 cells, 159 octets.  Here
    the 100 are the frame that the kernel counts."""
    with harness.bed() as bed:
        quiet_link(bed)
        found = counted(bed, 0, [100 - ETHERNET_BYTES])
        assert found == [159], found


# VXLAN

VNI, VXLAN_PORT = 7, 4789
INNER = ("198.19.0.1", "198.19.0.2")
TRANSFER_BYTES = 400_000


def vxlan_between(bed, six, mtu):
    """VXLAN devices over the veth, whose kernel's default MTU is what fits."""
    outer = (harness.A6, harness.B6) if six else (harness.A4, harness.B4)
    for i, host in enumerate((bed.a, bed.b)):
        try:
            host.run("ip", "link", "add", "tunnel", "type", "vxlan", "id",
                     str(VNI), "dstport", str(VXLAN_PORT), "local", outer[i],
                     "remote", outer[1 - i], "dev", "wire")
        except AssertionError as error:
            raise harness.Skip(f"no VXLAN in this kernel: {error}") from None
        host.run("ethtool", "-K", "tunnel", "tso", "off", "gso", "off", "gro",
                 "off", "tx", "off")
        host.run("ip", "link", "set", "tunnel", "up")
        host.run("ip", "address", "add", f"{INNER[i]}/24", "dev", "tunnel")


def full_frames(frames):
    """(frame octets, payload octets) of TCP in VXLAN as tshark decodes them:
    those of the commonest payload."""
    with tempfile.TemporaryDirectory(prefix="plafond-cells-") as folder:
        rows = dissect.decode(folder, dissect.ETHERNET, frames,
                              ["frame.len", "frame.protocols", "tcp.len"])
    found = [(int(row["frame.len"][0]), int(row["tcp.len"][0]))
             for row in rows if ":vxlan:eth:ethertype:ip:tcp" in
             row["frame.protocols"][0] and row["tcp.len"] != ["0"]]
    assert found, f"no TCP in VXLAN in {len(frames)} frames"
    largest = max(found)
    assert sum(octets for _, octets in found) >= TRANSFER_BYTES
    return largest, found.count(largest), len(found)


def test_vxlan_of_the_kernel():
    for six, mtu in ((False, 1500), (True, 1500), (False, 1550),
                     (False, 9000)):
        with harness.bed() as bed:
            bed.link(mtu)
            bed.offloads_off()
            vxlan_between(bed, six, mtu)
            frames = capture.during(
                bed.b, "wire", lambda: capture.transfer(
                    bed.a, bed.b, INNER[1], TRANSFER_BYTES))
            largest, count, total = full_frames(frames)
        one, = ladder.ladders([({
            "circuit": "VXLAN-01",
            "medium": {"kind": "ethernet", "line-rate": "1 Gbit/s"},
            "layers": ["ethernet", "ipv6" if six else "ipv4", "udp", "vxlan",
                       "ethernet", "ipv4", "tcp"],
            "mtu": f"{mtu} B"}, [])])
        expected = (one.levels["frame-without-fcs"], one.payload)
        print(f"MTU {mtu}, IPv{6 if six else 4} outside: {count} of {total} "
              f"segments in frames of {largest[0]} B with {largest[1]} B")
        assert largest == expected, f"kernel {largest}, program {expected}"
        # All but the first and the last of each burst.
        assert count >= total / 2
