# SPDX-License-Identifier: GPL-3.0-or-later
"""Octets of every layer against packets that others build and tshark decodes.

For each stack below and many packet sizes, `plafond ceiling` says what the
largest packet within the MTU costs at each layer.  encoders.py builds that
packet: its octets at each layer must be those, an octet more of payload must
not fit, and tshark must find in it the layers that were declared, with the
lengths and checksums that their headers state.

What builds each layer (python3-scapy 2.5, python3-cryptography 38):

  ethernet, vlan, mpls, pseudowire, pppoe, gre, ipv4, ipv6, udp, tcp, vxlan,
  geneve, l2tp, llc-snap    Scapy
  esp, macsec               Scapy's security associations, really encrypted;
                            tshark decrypts what it can
  wireguard                 Scapy's header, the AEAD of cryptography
  wlan                      Scapy's headers and FCS; the AEADs of cryptography
  ppp                       Scapy's, with the protocol field of RFC 1661
                            section 2 (Scapy 2.5 compresses it)
  hdlc, frame-relay, llc-ppp, l2tpv3, gfp, docsis
                            by hand in encoders.py from the standard named
                            there, for Scapy has none; tshark decodes them
                            and verifies the check sequences they have
  aal5                      test_cells.py: cells as iproute2 counts them
  tls, dtls                 test_records.py: OpenSSL
  NOT_BUILT                 nothing: listed below, and printed by a test

FCS of Ethernet: zlib.crc32, verified by tshark.
"""
import json
import random
import struct
import tempfile
import zlib
from fractions import Fraction

import dissect
import encoders
import harness
import ladder
from encoders import name_of, options_of

# What nothing can build here, and why.
NOT_BUILT = {
    "layer ptm": "neither Scapy nor tshark knows the 64/65 coding of PTM",
    "layer gem": "neither Scapy nor tshark knows GEM frames",
    "layer xgem": "neither Scapy nor tshark knows XGEM frames",
    "layer lte": "tshark decodes RLC and PDCP only behind a framing of its "
                 "own, and nothing here builds them",
    "layer nr": "as lte",
    "layer quic": "Scapy 2.5 has no QUIC, Debian 12 no library of it, and "
                  "tshark decodes no 1-RTT packet without its handshake; "
                  "test_records.py seals the packet with cryptography",
    "dtls version 1.3": "OpenSSL 3.0 has DTLS up to 1.2",
    "macsec icv-bytes below 16": "Scapy, like Linux, sends 16 always",
    "preamble, SFD, gap": "no capture has them",
    "flags and stuffing of hdlc, frame-relay": "no capture has them; the "
                  "averages are simulated in test_formulas.py",
    "FCS of frame-relay": "tshark takes no FCS there",
}

SEED = 4303


def over(*layers, bottom="ethernet", top=("ipv4", "tcp")):
    return [bottom, *layers, *top]


PLAIN = [
    ["ethernet", "ipv4", "udp"],
    ["ethernet", "ipv4", {"tcp": {"timestamps": False}}],
    ["ethernet", "ipv4", {"tcp": {"timestamps": True, "options-bytes": 20}}],
    ["ethernet", {"ipv4": {"options-bytes": 40}}, "udp"],
    ["ethernet", "ipv6", "tcp"],
    ["ethernet", {"ipv6": {"extension-bytes": 8}}, "udp"],
    ["ethernet", {"ipv6": {"extension-bytes": 64}}, "tcp"],
    over("vlan"),
    over("vlan", "vlan"),
    over({"mpls": {"labels": 1}}),
    over("vlan", {"mpls": {"labels": 3}}, top=("ipv6", "udp")),
    over("mpls", {"pseudowire": {"control-word": True}}, "ethernet"),
    over({"mpls": {"labels": 2}}, {"pseudowire": {"control-word": False}},
         "ethernet", "vlan"),
    over("pppoe", "ppp"),
    over("vlan", "pppoe", "ppp", top=("ipv6", "tcp")),
    over({"macsec": {"sci": True}}),
    over("vlan", {"macsec": {"sci": False}}, "vlan"),
    over({"macsec": {"sci": True}}, "mpls", top=("ipv6", "udp")),
]
TUNNELS = [
    over("ipv4"),
    over("ipv4", top=("ipv6", "tcp")),
    over("ipv6"),
    over({"ipv6": {"extension-bytes": 8}}, top=("ipv6", "udp")),
    over("ipv4", "gre"),
    over("ipv4", {"gre": {"checksum": True}}),
    over("ipv4", {"gre": {"key": True, "sequence": True}}),
    over("ipv6", {"gre": {"checksum": True, "key": True, "sequence": True}},
         "ethernet", "vlan"),
    over("ipv4", "gre", {"mpls": {"labels": 2}}, top=("ipv4", "udp")),
    over("ipv4", "udp", "vxlan", "ethernet"),
    over("vlan", "ipv6", "udp", "vxlan", "ethernet", "vlan"),
    over("ipv4", "udp", "geneve", "ethernet"),
    over("ipv6", "udp", {"geneve": {"options-bytes": 132}}, "ethernet"),
    over("ipv4", "udp", "l2tp", "ppp"),
    over("ipv4", "udp", {"l2tp": {"length": True, "sequence": True,
                                  "offset-bytes": 6}},
         {"ppp": {"address-control": False}}),
    over("pppoe", "ppp", "ipv4", "udp", "vxlan", "ethernet"),
]


def esp_stacks():
    """Each cipher with each integrity that goes with it, in tunnel and in
    transport mode, over IPv4 and IPv6, with and without NAT traversal."""
    stacks = []
    for cipher in encoders.ESP_CIPHERS:
        alone = cipher not in ("aes-cbc", "null")
        for integrity in encoders.ESP_INTEGRITIES:
            if alone != (integrity is None):
                continue
            options = {"cipher": cipher}
            if integrity:
                options["integrity"] = integrity
            for lower, top in (
                    (["ipv4"], ["ipv4", "tcp"]), (["ipv4"], ["tcp"]),
                    (["ipv4", "udp"], ["ipv4", "tcp"]),
                    (["ipv6", "udp"], ["udp"]), (["ipv6"], ["ipv6", "udp"])):
                stacks.append(["ethernet", *lower, {"esp": options}, *top])
    return stacks


def l2tpv3_stacks(cookie_bytes, sublayer):
    layer = {"l2tpv3": {"cookie-bytes": cookie_bytes, "sublayer": sublayer}}
    return [over("ipv4", layer, "ethernet"),
            over("ipv6", "udp", layer, "ethernet", "vlan")]


ENCRYPTED = [
    over("ipv4", "udp", {"wireguard": {"mtu": 1420}}),
    over("ipv6", "udp", {"wireguard": {"mtu": 1440}}),
    over("ipv4", "udp", {"wireguard": {"mtu": 1391}}, top=("ipv4", "udp")),
    over("ipv4", {"esp": {"cipher": "aes-gcm-16"}}, "gre"),
    over("ipv4", "gre", "ipv4", {"esp": {"cipher": "aes-gcm-16"}}),
]

# tshark's names of the layers, as frame.protocols has them.
NAMES = {"mpls": "mpls", "pppoe": "pppoes", "ppp": "ppp", "ipv4": "ip",
         "ipv6": "ipv6", "gre": "gre", "udp": "udp", "tcp": "tcp",
         "vxlan": "vxlan", "geneve": "geneve", "l2tp": "l2tp",
         "l2tpv3": "l2tp", "macsec": "macsec", "wireguard": "wg",
         "frame-relay": "fr", "llc-snap": "llc", "gfp": "gfp",
         "docsis": "docsis", "llc-ppp": "llc:osi", "wlan": "wlan:llc"}
FIELDS = ["frame.len", "frame.protocols", "ip.len", "ipv6.plen",
          "udp.length", "tcp.len", "ip.checksum.status",
          "tcp.checksum.status", "udp.checksum.status", "_ws.malformed",
          "esp.icv_bad", "gre.checksum.status"]
# Check sequences that tshark has verified; of PPP a wrong one makes a remark.
CHECKED = {
    dissect.ETHERNET: {"eth.fcs.status": ["1"]},
    dissect.PPP_HDLC: {"_ws.expert.message": []},
    dissect.GFP_F: {"gfp.chec.status": ["1"], "gfp.thec.status": ["1"],
                    "gfp.fcs.bad": [], "eth.fcs.status": ["1"]},
    dissect.DOCSIS: {"docsis.hcs.status": ["1"]},
    dissect.IEEE802_11: {"wlan.fcs.status": ["1"]},
}


def with_units(options):
    """Options as a declaration has them."""
    return {key: f"{value} B" if key.endswith("bytes") or key == "mtu"
            else value for key, value in options.items()}


def declared(stack, medium):
    layers = [layer if isinstance(layer, str) else
              {name_of(layer): with_units(options_of(layer))}
              for layer in stack]
    return {"circuit": "ENCODED-01", "medium": medium, "layers": layers}


GIGABIT = {"kind": "ethernet", "line-rate": "1 Gbit/s"}


def payload_of(octets, seed):
    """Letters, the same every time: no protocol begins like them."""
    start = seed % 16
    return (b"abcdefghijklmnop" * (octets // 16 + 2))[start:start + octets]


# What the lowest layer adds and no capture has: the FCS and what is around the
# frame (preamble, SFD and gap; a flag).  HDLC's and 802.11's FCS are captured.
NOT_CAPTURED = {"ethernet": (4, 20), "hdlc": (0, 1), "frame-relay": (2, 1)}
FCS_BYTES = {"ethernet": 4, "hdlc": 2, "frame-relay": 2, "wlan": 4}


def check_ladder(stack, size, ladder_, built):
    """The program's octets are those of the packet that was built."""
    names = [name_of(layer) for layer in stack]
    where = f"{names} at {size} B"
    lengths = [len(octets) for octets in built] + [ladder_.payload]
    costs = ladder_.costs(names)
    found = [lengths[i] - lengths[i + 1] for i in range(len(names))]
    found[0] += sum(NOT_CAPTURED.get(names[0], ()))
    if names[0] == "aal5":
        found[0] += lengths[0] // 48 * 5	# headers of the cells
    if names[1:3] == ["llc-snap", "ethernet"]:
        found[1:3] = found[1] - 2, found[2] + 2	# the pad is Ethernet's
    frame = next((i for i, name in enumerate(names) if name in FCS_BYTES), None)
    if frame is not None:
        fcs = NOT_CAPTURED.get(names[frame], (0, 0))[0]
        if names[0] == "aal5":
            fcs = 0		# bridged without it (RFC 2684 section 5.2)
        assert ladder_.levels["frame"] == lengths[frame] + fcs, \
            f"{where}: {ladder_.levels}, built {lengths}"
        own_fcs = FCS_BYTES[names[frame]] if names[0] != "aal5" else 0
        own_fcs = options_of(stack[frame]).get("fcs-bytes", own_fcs)
        assert ladder_.levels["frame-without-fcs"] == \
            ladder_.levels["frame"] - own_fcs, f"{where}: {ladder_.levels}"
        if frame == 1:		# the layer below holds the FCS
            found[:2] = found[0] - fcs, found[1] + fcs
    if names[0] == "ethernet":
        assert ladder_.levels["line"] == lengths[0] + 24, where
    assert costs == found, f"{where}: {list(map(float, costs))}, " \
        f"but the packet has {found}"
    lowest = min(names.index(name) for name in ("ipv4", "ipv6")
                 if name in names)
    highest = max(i for i, name in enumerate(names)
                  if name in ("tcp", "udp"))
    assert ladder_.levels["packet"] == lengths[lowest] <= size, where
    assert ladder_.levels["segment"] == lengths[highest], where
    return lowest


def tunnel_limit(stack):
    """MTU of a tunnel and where the packet in it begins."""
    for i, layer in enumerate(stack):
        if name_of(layer) == "wireguard":
            return i + 1, options_of(layer)["mtu"]
    return None


def check_largest(stack, size, lowest, payload):
    """One octet more does not fit."""
    built = encoders.encode(stack, payload + b"x")
    limit = tunnel_limit(stack)
    fits = len(built[lowest]) <= size and \
        (not limit or len(built[limit[0]]) <= limit[1])
    assert not fits, f"{stack} at {size} B: {len(payload) + 1} B fit"


def expected_protocols(stack):
    """What tshark calls the layers; None at the end: it cannot see further."""
    names, out = [name_of(layer) for layer in stack], []
    for i, name in enumerate(names):
        if name == "ethernet":
            # That of a session of L2TPv3 has no name of its own.
            out += ["eth"] if names[i - 1] != "l2tpv3" else []
            out += ["ethertype"]
        elif name == "vlan":
            out += ["ieee8021ad" if names[i + 1] == "vlan" else "vlan",
                    "ethertype"]
        elif name == "esp":
            out += ["udpencap"] if names[i - 1] == "udp" else []
            out.append("esp")
            if not encoders.ESP_CIPHERS[options_of(stack[i])["cipher"]][3]:
                return out, i + 1
        elif name in ("llc-ppp", "wlan"):
            out += NAMES[name].split(":")
        elif name in NAMES:
            out += ["raw"] if names[:i] == ["aal5"] and name != "llc-snap" \
                and name != "ppp" else []
            out.append(NAMES[name])
        if name in ("macsec", "wireguard"):
            return out, i + 1
    return out + ["data"], len(names)


def check_decoded(stack, built, payload, row):
    names = [name_of(layer) for layer in stack]
    expected, seen = expected_protocols(stack)
    where = f"{names}: {row}"
    protocols = [name for name in row["frame.protocols"][0].split(":")
                 if name != "ipv6.dstopts"]
    assert protocols[:len(expected)] == expected, \
        f"{where}\nexpected {expected}"
    assert not row["_ws.malformed"] and \
        set(row["esp.icv_bad"]) <= {"0"}, where
    for name, field, less in (("ipv4", "ip.len", 0),
                              ("ipv6", "ipv6.plen", 40),
                              ("udp", "udp.length", 0)):
        lengths = [str(len(built[i]) - less) for i in range(seen)
                   if names[i] == name]
        assert row[field] == lengths, f"{where}\nexpected {name} {lengths}"
    if seen == len(names) and names[-1] == "tcp":
        assert row["tcp.len"] == [str(len(payload))], where
        assert row["tcp.checksum.status"][-1] == "1", where
    for field in ("ip.checksum.status", "gre.checksum.status"):
        assert set(row[field]) <= {"1"}, where


def esp_preferences(stacks):
    """tshark's table of security associations: all that the stacks use."""
    lines = {}
    for options in (options_of(layer) for stack in stacks for layer in stack
                    if name_of(layer) == "esp"):
        _, key_bytes, _, cipher = encoders.ESP_CIPHERS[options["cipher"]]
        _, auth_bytes, auth = \
            encoders.ESP_INTEGRITIES[options.get("integrity")]
        if cipher is None:
            continue
        for protocol in ("IPv4", "IPv6"):
            key, auth_key = (f"0x{encoders.KEY[:octets].hex()}"
                             for octets in (key_bytes, auth_bytes))
            words = [protocol, "*", "*", f"0x{encoders.spi_of(options):08x}",
                     cipher, key, auth, auth_key]
            line = ",".join(f'"{word}"' for word in words)
            lines[line] = f"uat:esp_sa:{line}"
    return ["esp.enable_encryption_decode:TRUE",
            "esp.enable_authentication_check:TRUE",
            "esp.do_esp_sequence_analysis:FALSE", *lines.values()]


def check(stacks, sizes, medium=GIGABIT, link_type=dissect.ETHERNET,
          preferences=(), direction="a-to-b"):
    """All stacks at all sizes."""
    jobs = [(stack, size) for stack in stacks for size in sizes(stack)]
    found = ladder.ladders(
        [(declared(stack, medium), ["--set", f"mtu={size} B"])
         for stack, size in jobs], direction)
    packets = []
    for (stack, size), one in zip(jobs, found):
        if direction == "b-to-a":
            stack = upstream(stack)
        payload = payload_of(int(one.payload), size)
        built = encoders.encode(stack, payload)
        lowest = check_ladder(stack, size, one, built)
        check_largest(stack, size, lowest, payload)
        packets.append((stack, built, payload))
    decode(packets, stacks, link_type, preferences)
    print(f"{len(stacks)} stacks, {len(jobs)} packets built, decoded and "
          "equal")


def check_sweep(stacks, first, last):
    """The same at every size from first to last, by the rates on a line of
    1 Gbit/s: rate = line * octets / octets of the line, rounded down."""
    found = ladder.sweeps([(declared(stack, GIGABIT),
                            f"mtu={first} B..{last} B:1 B")
                           for stack in stacks])
    packets = []
    for stack, points in zip(stacks, found):
        assert len(points) == last - first + 1
        for point in map(ladder.Point, points):
            # packet / line = packet / (packet + 38)
            ratio = Fraction(point.bps("packet"), 10 ** 9)
            packet = round(38 * ratio / (1 - ratio))
            octets = round(Fraction(point.bps("payload") * (packet + 38),
                                    10 ** 9))
            payload = payload_of(octets, point.number)
            built = encoders.encode(stack, payload)
            check_rates(stack, point, built, octets)
            check_largest(stack, point.number, 1, payload)
            packets.append((stack, built, payload))
    decode(packets, stacks, dissect.ETHERNET, [])
    print(f"{len(stacks)} stacks, {len(packets)} packets built, decoded and "
          "equal by their rates")


def check_rates(stack, point, built, octets):
    names = [name_of(layer) for layer in stack]
    highest = max(i for i, name in enumerate(names)
                  if name in ("tcp", "udp"))
    for level, length in (("line", len(built[0]) + 24),
                          ("frame", len(built[0]) + 4),
                          ("packet", len(built[1])),
                          ("segment", len(built[highest])),
                          ("payload", octets)):
        expected = 10 ** 9 * length // (len(built[0]) + 24)
        assert point.bps(level) == expected, \
            f"{names} at {point.number} B, {level}: {point.bps(level)}, " \
            f"packet {expected}"


def upstream(stack):
    """As it is away from the subscriber: DOCSIS has another header there."""
    options = options_of(stack[0])
    return [{name_of(stack[0]): options | {
        "downstream-header-bytes": options["upstream-header-bytes"]}},
        *stack[1:]]


def decode(packets, stacks, link_type, preferences):
    # tshark reads what the cells of AAL5 carry.
    frames = [built[1 if name_of(stack[0]) == "aal5" else 0]
              for stack, built, _ in packets]
    if link_type == dissect.ETHERNET:
        frames = [frame + struct.pack("<I", zlib.crc32(frame))
                  for frame in frames]
    with tempfile.TemporaryDirectory(prefix="plafond-decode-") as folder:
        rows = dissect.decode(
            folder, link_type, frames, [*FIELDS, *CHECKED.get(link_type, {})],
            preferences=["eth.fcs:Always", "eth.check_fcs:TRUE",
                         "ip.check_checksum:TRUE", "tcp.check_checksum:TRUE",
                         *esp_preferences(stacks), *preferences],
            decode_as=["mpls.label==100,pwethcw", "mpls.label==101,pwethnocw",
                       "l2tp.pw_type==0,eth"])
    for (stack, built, payload), frame, row in zip(packets, frames, rows):
        assert row["frame.len"] == [str(len(frame))], row
        for field, good in CHECKED.get(link_type, {}).items():
            assert row[field][:1] == good, row
        check_decoded(stack, built, payload, row)


def spread(stack):
    """Usual sizes and random ones, others for each stack."""
    names = [name_of(layer) for layer in stack]
    draw = random.Random(f"{SEED} {stack}")
    least = 1400 if "ipv6" in names else 256
    return sorted({1500, 9000} | {draw.randint(least, 2300)
                                  for _ in range(4)} |
                  {draw.randint(least, 9000) for _ in range(2)})


@harness.plain
def test_tags_labels_and_options():
    check(PLAIN, spread)


E1 = {"kind": "pdh", "signal": "e1", "framing": "framed"}
STM1 = {"kind": "sdh", "signal": "stm-1"}
CABLE = {"kind": "docsis-3.0", "downstream-channels": 8,
         "upstream-rate": "27 Mbit/s"}
ADSL = {"kind": "adsl2plus", "downstream": "24 Mbit/s",
        "upstream": "1 Mbit/s"}
WLAN = {"kind": "wlan", "generation": "802.11ac", "mcs": 9, "streams": 2,
        "channel-width": "80 MHz"}


@harness.plain
def test_hdlc_and_frame_relay():
    for fcs_bytes, text, medium in ((2, "16-Bit", E1), (4, "32-Bit", STM1)):
        layer = {"hdlc": {"fcs-bytes": fcs_bytes, "stuffing": "none",
                          "flags": 1}}
        check([[layer, "ppp", "ipv4", "tcp"], [layer, "ppp", "ipv6", "udp"],
               [layer, "ppp", "mpls", "ipv4", "udp"]], spread, medium,
              dissect.PPP_HDLC, [f"ppp.fcs_type:{text}"])
    layer = {"frame-relay": {"fcs-bytes": 2, "stuffing": "none"}}
    check([[layer, "ipv4", "tcp"], [layer, "ipv6", "udp"]], spread, E1,
          dissect.FRAME_RELAY)


@harness.plain
def test_gfp_and_docsis():
    for fcs in (False, True):
        check([[{"gfp": {"fcs": fcs}}, "ethernet", "vlan", "ipv4", "tcp"]],
              spread, STM1, dissect.GFP_F)
    for down, up in ((11, 4), (4, 0)):
        layer = {"downstream-header-bytes": down, "upstream-header-bytes": up}
        stack = [{"docsis": layer}, "ethernet", "ipv4", "tcp"]
        check([stack], spread, CABLE, dissect.DOCSIS)
        check([stack], spread, CABLE, dissect.DOCSIS, direction="b-to-a")


@harness.plain
def test_encapsulations_over_aal5():
    check([["aal5", "llc-snap", "ipv4", "tcp"],
           ["aal5", "llc-snap", "ipv6", "udp"],
           ["aal5", "llc-snap", "ethernet", "ipv4", "tcp"],
           ["aal5", "llc-snap", "ethernet", "vlan", "pppoe", "ppp", "ipv4",
            "tcp"],
           ["aal5", "llc-ppp", "ppp", "ipv4", "udp"]], spread, ADSL,
          dissect.ATM_RFC1483)
    check([["aal5", "ipv4", "tcp"], ["aal5", "ipv6", "udp"]], spread, ADSL,
          dissect.RAW_IP)
    check([["aal5", "ppp", "ipv4", "udp"]], spread, ADSL, dissect.PPP)


@harness.plain
def test_wlan():
    key = encoders.WLAN_TK.hex()
    check([[{"wlan": {"qos": qos, "encryption": cipher}}, "ipv4", "tcp"]
           for qos in (True, False) for cipher in ("none", "ccmp", "gcmp")]
          + [["wlan", "ipv6", "udp"]],
          lambda stack: [size for size in spread(stack) if size <= 2296],
          WLAN, dissect.IEEE802_11,
          ["wlan.check_fcs:TRUE", "wlan.check_checksum:TRUE",
           "wlan.enable_decryption:TRUE", f'uat:80211_keys:"tk","{key}"'])


@harness.plain
def test_tunnels():
    check(TUNNELS, spread)


@harness.plain
def test_l2tp_version_3():
    # tshark has to be told what only the two ends know.
    for cookie_bytes, cookie in ((0, "None"), (4, "4 Byte Cookie"),
                                 (8, "8 Byte Cookie")):
        for sublayer, text in ((False, "None"),
                               (True, "Default L2-Specific")):
            check(l2tpv3_stacks(cookie_bytes, sublayer),
                  lambda stack: [1400, 1499, 1500],
                  preferences=[f"l2tp.cookie_size:{cookie}",
                               f"l2tp.l2_specific:{text}"])


@harness.plain
def test_esp_of_each_cipher_and_mode():
    # Each residue of the block of 16 octets.
    stacks = esp_stacks()
    check(stacks, lambda stack: [1500])
    wide = [stack for stack in stacks if encoders.ESP_CIPHERS[options_of(
        next(layer for layer in stack if name_of(layer) == "esp"))["cipher"]
        ][0] == "AES-CBC"]
    check_sweep(wide, 1483, 1499)
    check_sweep([stack for stack in stacks if stack not in wide], 1495, 1499)


@harness.plain
def test_wireguard_and_tunnels_in_tunnels():
    check(ENCRYPTED, lambda stack: [1520, 1600] if "ipv6" in stack
          else [1480, 1481, 1496, 1500])


@harness.plain
def test_every_layer_is_built_or_named():
    """What nothing can build here is listed, each with the reason; every
    other layer is in a stack of these tests."""
    shown = json.loads(ladder.run_program(["layers", "--format", "json"]))
    layers = {layer["name"] for layer in shown["layers"]}
    named = {name.split()[1] for name in NOT_BUILT
             if name.startswith("layer ")}
    elsewhere = {"tls", "dtls"}		# test_records.py
    built = set(encoders.ENCODERS) | elsewhere
    assert layers == built | named, \
        f"neither built nor named: {layers - built - named}; " \
        f"no such layer: {(built | named) - layers}"
    assert not built & named
    print("what nothing can build here:")
    for name, reason in NOT_BUILT.items():
        print(f"  {name}: {reason}")
