# SPDX-License-Identifier: GPL-3.0-or-later
"""Packets of a declared stack, built by others than us.

encode(stack, payload) builds one real packet, from the payload downward, and
gives its octets as they are at each layer.  Scapy builds the headers, its
security associations encrypt, with python3-cryptography under them.  Where
Scapy has no encoder the header is written here from the text of the standard
that stands beside it, and tshark must decode the result (BY_HAND names them).
Nothing here knows what plafond says.
"""
import logging
import struct
import zlib

logging.getLogger("scapy").setLevel(logging.ERROR)

from cryptography.hazmat.primitives.ciphers import aead  # noqa: E402
from scapy.contrib.geneve import GENEVE, GeneveOptions  # noqa: E402
from scapy.contrib.macsec import MACsec, MACsecSA  # noqa: E402
from scapy.contrib.mpls import EoMCW, MPLS  # noqa: E402
from scapy.contrib.wireguard import (  # noqa: E402
    Wireguard, WireguardTransport)
from scapy.fields import ShortField  # noqa: E402
from scapy.layers.dot11 import (  # noqa: E402
    Dot11, Dot11CCMP, Dot11QoS)
from scapy.layers.inet import IP, TCP, UDP, IPOption  # noqa: E402
from scapy.layers.inet6 import (  # noqa: E402
    IPv6, IPv6ExtHdrDestOpt, PadN)
from scapy.layers.ipsec import ESP, SecurityAssociation  # noqa: E402
from scapy.layers.l2 import (  # noqa: E402
    Dot1AD, Dot1Q, Ether, GRE, LLC, SNAP)
from scapy.layers.l2tp import L2TP  # noqa: E402
from scapy.layers.ppp import HDLC, PPPoE  # noqa: E402
from scapy.layers.vxlan import VXLAN  # noqa: E402
from scapy.packet import Packet, Raw  # noqa: E402

MAC_A, MAC_B = "52:54:00:00:00:01", "52:54:00:00:00:02"
A4, B4 = "198.18.0.1", "198.18.0.2"		# RFC 2544's addresses
A6, B6 = "2001:2::1", "2001:2::2"		# RFC 5180's addresses
PORT = 61742
# Keys of tests: octets 0, 1, 2, ...
KEY = bytes(range(64))

# Encryption as the declaration names it: Scapy's name; octets of the key with
# its salt; of the ICV where Scapy must be told; tshark's name, or None where
# tshark 4.0 cannot decrypt it.
ESP_CIPHERS = {
    "aes-gcm-16": ("AES-GCM", 20, 16, "AES-GCM with 16 octet ICV [RFC4106]"),
    "aes-gcm-12": ("AES-GCM", 20, 12, "AES-GCM with 12 octet ICV [RFC4106]"),
    "aes-gcm-8": ("AES-GCM", 20, 8, "AES-GCM with 8 octet ICV [RFC4106]"),
    "chacha20-poly1305": ("CHACHA20-POLY1305", 36, 16, None),
    "aes-cbc": ("AES-CBC", 16, None, "AES-CBC [RFC3602]"),
    "null": ("NULL", 0, None, "NULL"),
}
# The same for integrity; Scapy's and tshark's names, octets of the key.
ESP_INTEGRITIES = {
    None: (None, 0, "NULL"),
    "hmac-sha1-96": ("HMAC-SHA1-96", 20, "HMAC-SHA-1-96 [RFC2404]"),
    "hmac-sha2-256-128": ("SHA2-256-128", 32, "HMAC-SHA-256-128 [RFC4868]"),
    "hmac-sha2-384-192": ("SHA2-384-192", 48, "HMAC-SHA-384-192 [RFC4868]"),
    "hmac-sha2-512-256": ("SHA2-512-256", 64, "HMAC-SHA-512-256 [RFC4868]"),
}


class L2TPv3(Raw):
    """Written here by hand: Scapy 2.5 has version 2 alone."""


class PPP(Packet):
    """Scapy 2.5 writes a protocol number below 256 in one octet, which RFC
    1661 section 6.5 allows only where it was negotiated and RFC 2516 section
    7 advises against: the uncompressed field of section 2 is here."""
    name = "PPP"
    fields_desc = [ShortField("proto", 0x0021)]


def protocol_of(packet, four, six):
    """The number by which a header says that IPv4 or IPv6 follows."""
    return six if isinstance(packet, IPv6) else four


def option_rows(count):
    """IP or TCP options of `count` octets: NOPs alone."""
    return [("NOP", None)] * count


# One function a layer: what it carries, its options, the names below it (the
# nearest last), and it returns the packet with the layer around it.

def ethernet(carried, options, below):
    types = {PPPoE: 0x8864, MPLS: 0x8847, MACsec: 0x88e5}
    kind = types.get(type(carried),
                     protocol_of(carried, 0x0800, 0x86dd))
    if isinstance(carried, Dot1AD):
        kind = 0x88a8
    elif isinstance(carried, Dot1Q):
        kind = 0x8100
    return Ether(src=MAC_A, dst=MAC_B, type=kind) / carried


def vlan(carried, options, below):
    kind = {PPPoE: 0x8864, MPLS: 0x8847, MACsec: 0x88e5}.get(
        type(carried), protocol_of(carried, 0x0800, 0x86dd))
    if isinstance(carried, Dot1Q):
        return Dot1AD(vlan=9, type=0x8100) / carried
    return Dot1Q(vlan=7, type=kind) / carried


def macsec(carried, options, below):
    sa = MACsecSA(sci=b"\x52\x54\x00\x00\x00\x01\x00\x01", an=0, pn=100,
                  key=KEY[:16], icvlen=16, encrypt=True,
                  send_sci=options.get("sci", True))
    return sa.encrypt(sa.encap(ethernet(carried, {}, ["macsec"])))[MACsec]


def mpls(carried, options, below):
    labels = options.get("labels", 1)
    for i in range(labels):
        # Labels say by what tshark is to decode what follows.
        label = {EoMCW: 100, Ether: 101}.get(type(carried), 102)
        carried = MPLS(label=label + 10 * i, s=1 if i == 0 else 0,
                       ttl=64) / carried
    return carried


def pseudowire(carried, options, below):
    return EoMCW() / carried if options.get("control-word", True) else carried


def pppoe(carried, options, below):
    return PPPoE(sessionid=1) / carried


def ppp(carried, options, below):
    number = 0x0281 if isinstance(carried, MPLS) else \
        protocol_of(carried, 0x0021, 0x0057)
    packet = PPP(proto=number) / carried
    # RFC 2661 section 5.1: address and control are there unless negotiated
    # away; RFC 2516 section 4 and RFC 2364 section 5: they are not.
    if below[-1] == "l2tp" and options.get("address-control", True):
        return HDLC() / packet
    return packet


def ipv4(carried, options, below):
    packet = IP(src=A4, dst=B4, ttl=64, id=1,
                options=[IPOption(b"\x01")] * options.get("options-bytes", 0))
    if not isinstance(carried, (IP, IPv6, TCP, UDP, GRE, ESP)):
        packet.proto = 115		# L2TPv3, RFC 3931 section 4.1.1
    elif isinstance(carried, (IP, IPv6)):
        packet.proto = protocol_of(carried, 4, 41)
    return packet / carried


def ipv6(carried, options, below):
    packet = IPv6(src=A6, dst=B6, hlim=64)
    extension = options.get("extension-bytes", 0)
    if extension:
        packet = packet / IPv6ExtHdrDestOpt(
            options=[PadN(optdata=bytes(extension - 4))])
    if not isinstance(carried, (IP, IPv6, TCP, UDP, GRE, ESP)):
        packet.lastlayer().nh = 115
    elif isinstance(carried, (IP, IPv6)):
        packet.lastlayer().nh = protocol_of(carried, 4, 41)
    return packet / carried


def gre(carried, options, below):
    kind = 0x6558 if isinstance(carried, Ether) else \
        0x8847 if isinstance(carried, MPLS) else \
        protocol_of(carried, 0x0800, 0x86dd)
    flags = {name: int(bool(options.get(option)))
             for name, option in (("chksum_present", "checksum"),
                                  ("key_present", "key"),
                                  ("seqnum_present", "sequence"))}
    return GRE(proto=kind, key=1, sequence_number=1, **flags) / carried


def udp(carried, options, below):
    ports = {VXLAN: 4789, GENEVE: 6081, L2TP: 1701, L2TPv3: 1701, ESP: 4500,
             Wireguard: 51820}
    port = ports.get(type(carried), PORT)
    source = port if port in (1701, 4500) else PORT
    return UDP(sport=source, dport=port) / carried


def tcp(carried, options, below):
    rows = option_rows(options.get("options-bytes", 0))
    if options.get("timestamps", True):
        rows = option_rows(2) + [("Timestamp", (1, 2))] + rows
    return TCP(sport=PORT, dport=PORT, flags="A", seq=1, ack=1,
               options=rows) / carried


def vxlan(carried, options, below):
    return VXLAN(vni=7, flags="Instance") / carried


def geneve(carried, options, below):
    # Scapy 2.5 drops a bit of the length of options over 60 octets, so it is
    # stated.  One option holds 124 octets at most (5 bits of words).
    left, rows = options.get("options-bytes", 0), []
    stated = left // 4
    while left:
        octets = min(left, 4 + 124)
        rows.append(GeneveOptions(classid=0xffff, type=1,
                                  data=bytes(octets - 4)))
        left -= octets
    return GENEVE(vni=7, proto=0x6558, optionlen=stated,
                  options=rows) / carried


def l2tp(carried, options, below):
    flags = [flag for flag in ("length", "sequence") if options.get(flag)]
    pad = options.get("offset-bytes")
    if pad is None:
        return L2TP(hdr="+".join(flags) or 0, tunnel_id=1,
                    session_id=1) / carried
    # Scapy always pads its offset field to 4 octets, that is by 2.
    packet = L2TP(hdr="+".join(flags + ["offset"]), tunnel_id=1,
                  session_id=1, offset=pad)
    return packet / Raw(bytes(pad - 2)) / carried


def l2tpv3(carried, options, below):
    """RFC 3931 sections 4.1.1 and 4.1.2: over UDP flags, version and 16
    reserved bits come first; then session, cookie, default sublayer."""
    head = struct.pack("!HH", 3, 0) if below[-1] == "udp" else b""
    head += struct.pack("!I", 1) + b"C" * options.get("cookie-bytes", 0)
    if options.get("sublayer", True):
        head += struct.pack("!I", 0)
    return L2TPv3(head) / carried


def spi_of(options):
    """An SPI of its own for each pair of transforms."""
    return 0x5000 + 16 * list(ESP_CIPHERS).index(options["cipher"]) + \
        list(ESP_INTEGRITIES).index(options.get("integrity"))


def esp(carried, options, below):
    name, key_bytes, icv_bytes, _ = ESP_CIPHERS[options["cipher"]]
    auth, auth_bytes, _ = ESP_INTEGRITIES[options.get("integrity")]
    words = {"crypt_algo": name, "crypt_key": KEY[:key_bytes],
             "crypt_icv_size": icv_bytes, "auth_algo": auth,
             "auth_key": KEY[:auth_bytes]}
    outer = IP(src=A4, dst=B4) if "ipv4" in below else \
        IPv6(src=A6, dst=B6)
    if below[-1] == "udp":
        words["nat_t_header"] = UDP(sport=4500, dport=4500)
    packet = carried
    if isinstance(carried, (IP, IPv6)):
        words["tunnel_header"] = outer
    else:
        packet = outer / carried
    sa = SecurityAssociation(ESP, spi=spi_of(options), **words)
    sealed = sa.encrypt(packet.__class__(bytes(packet)))[ESP]
    # Scapy 2.5 leaves a tag of GCM at 16 octets; a shorter one is its
    # beginning (RFC 4106 section 6).
    if name == "AES-GCM":
        sealed.data = sealed.data[:len(sealed.data) - (16 - icv_bytes)]
    return sealed


def wireguard(carried, options, below):
    """The author's paper, section 5.4.6: zeros up to a multiple of 16, not
    beyond the tunnel's MTU; type, receiver, counter in the clear."""
    inner = bytes(carried)
    padded = min(-(-len(inner) // 16) * 16, max(options["mtu"], len(inner)))
    inner += bytes(padded - len(inner))
    sealed = aead.ChaCha20Poly1305(KEY[:32]).encrypt(
        struct.pack("<IQ", 0, 5), inner, b"")
    return Wireguard(message_type=4) / WireguardTransport(
        receiver_index=1, counter=5, encrypted_encapsulated_packet=sealed)


def hdlc(carried, options, below):
    """RFC 1662 section 3.1: address and control, then the FCS over them and
    all that follows, lowest octet first.  The flag is not in a capture."""
    body = bytes(HDLC() / carried)
    if options.get("fcs-bytes", 2) == 4:
        return Raw(body + struct.pack("<I", zlib.crc32(body)))
    return Raw(body + struct.pack("<H", fcs16(body)))


def fcs16(octets):
    """RFC 1662 appendix C.1: x^16 + x^12 + x^5 + 1, reversed, inverted."""
    value = 0xffff
    for octet in octets:
        value ^= octet
        for _ in range(8):
            value = value >> 1 ^ (0x8408 if value & 1 else 0)
    return value ^ 0xffff


def frame_relay(carried, options, below):
    """RFC 2427 section 3 and 4.1: Q.922 address of two octets, control UI,
    and the NLPID of IPv4 or IPv6."""
    nlpid = protocol_of(carried, 0xcc, 0x8e)
    return Raw(b"\x04\x01\x03" + bytes([nlpid])) / carried


def aal5(carried, options, below):
    """ITU-T I.363.5: padded to whole cells with a trailer of 8 octets, the
    last 4 of which check the rest, highest bit first."""
    octets = bytes(carried)
    octets += bytes(-(len(octets) + 8) % 48) + \
        struct.pack("!BBH", 0, 0, len(octets))
    return Raw(octets + crc32_of_atm(octets))


def crc32_of_atm(octets):
    """zlib's CRC-32 with the bits of everything turned around."""
    turned = bytes(int(f"{octet:08b}"[::-1], 2) for octet in octets)
    return struct.pack("!I", int(f"{zlib.crc32(turned):032b}"[::-1], 2))


def llc_snap(carried, options, below):
    """RFC 2684 sections 5.1 and 5.2: routed, or bridged with a pad of 2."""
    if isinstance(carried, Ether):
        return LLC(dsap=0xaa, ssap=0xaa, ctrl=3) / \
            SNAP(OUI=0x0080c2, code=7) / Raw(bytes(2)) / carried
    return LLC(dsap=0xaa, ssap=0xaa, ctrl=3) / \
        SNAP(OUI=0, code=protocol_of(carried, 0x0800, 0x86dd)) / carried


def llc_ppp(carried, options, below):
    """RFC 2364 section 6: LLC FE-FE-03 and the NLPID of PPP."""
    return LLC(dsap=0xfe, ssap=0xfe, ctrl=3) / Raw(b"\xcf") / carried


def crc16(octets):
    """x^16 + x^12 + x^5 + 1, highest bit first, from 0: ITU-T G.7041 section
    6.1.1.1.2."""
    value = 0
    for octet in octets:
        value ^= octet << 8
        for _ in range(8):
            value = value << 1 ^ (0x11021 if value & 0x8000 else 0)
    return struct.pack("!H", value)


def with_fcs(carried):
    """Ethernet frames that a line carries whole keep their FCS."""
    octets = bytes(carried)
    return octets + struct.pack("<I", zlib.crc32(octets))


def gfp(carried, options, below):
    """ITU-T G.7041 sections 6.1.1 and 6.1.2: length and cHEC, client data
    with a null extension header, user payload Ethernet, tHEC; FCS-32."""
    octets = with_fcs(carried)
    kind = struct.pack("!BB", 0x10 if options.get("fcs") else 0, 1)
    payload = kind + crc16(kind) + octets
    if options.get("fcs"):
        payload += crc32_of_atm(octets)
    length = struct.pack("!H", len(payload))
    return Raw(length + crc16(length) + payload)


def docsis(carried, options, below):
    """CableLabs MULPI section 6.2: FC, MAC_PARM, LEN, extended header, HCS.
    Elements of it are as long as a downstream service header (6) and privacy
    (5 down, 4 up) are."""
    rows = {11: bytes([0x85]) + bytes(5) + bytes([0x44]) + bytes(4),
            4: bytes([0x73]) + bytes(3), 0: b""}
    extended = rows[options["downstream-header-bytes"]]
    octets = with_fcs(carried)
    head = struct.pack("!BBH", 1 if extended else 0, len(extended),
                       len(extended) + len(octets)) + extended
    return Raw(head + struct.pack("<H", fcs16(head)) + octets)


WLAN_TK = KEY[:16]


def wlan(carried, options, below):
    """A QoS data frame to an access point, sealed by IEEE 802.11 sections
    12.5.3 (CCMP) and 12.5.5 (GCMP)."""
    cipher = options.get("encryption", "ccmp")
    qos = options.get("qos", True)
    head = Dot11(type=2, subtype=8 if qos else 0, addr1=MAC_B, addr2=MAC_A,
                 addr3=MAC_B, FCfield=0x41 if cipher != "none" else 0x01)
    head = bytes(head / Dot11QoS() if qos else head)
    plain = bytes(LLC(dsap=0xaa, ssap=0xaa, ctrl=3) /
                  SNAP(OUI=0, code=protocol_of(carried, 0x0800, 0x86dd)) /
                  carried)
    if cipher != "none":
        number = struct.pack("!Q", 1)[2:]
        # Additional data: of frame control the subtype's low bits and what a
        # relay may change are masked; sequence control is 0; then QoS.
        additional = bytes([head[0] & 0x8f, head[1] & 0xc7 | 0x40]) + \
            head[4:22] + bytes(2) + head[24:26]
        address = bytes.fromhex(MAC_A.replace(":", ""))
        seal, nonce = (aead.AESCCM(WLAN_TK, tag_length=8),
                       b"\0" + address + number) if cipher == "ccmp" else \
            (aead.AESGCM(WLAN_TK), address + number)
        plain = bytes(Dot11CCMP(PN0=1, ext_iv=1, data=b"")) + \
            seal.encrypt(nonce, plain, additional)
    body = head + plain
    return Raw(body + struct.pack("<I", zlib.crc32(body)))


ENCODERS = {name.replace("_", "-"): function for name, function in (
    ("ethernet", ethernet), ("vlan", vlan), ("macsec", macsec),
    ("mpls", mpls), ("pseudowire", pseudowire), ("pppoe", pppoe),
    ("ppp", ppp), ("ipv4", ipv4), ("ipv6", ipv6), ("gre", gre),
    ("udp", udp), ("tcp", tcp), ("vxlan", vxlan), ("geneve", geneve),
    ("l2tp", l2tp), ("l2tpv3", l2tpv3), ("esp", esp),
    ("wireguard", wireguard), ("hdlc", hdlc), ("frame-relay", frame_relay),
    ("llc-snap", llc_snap), ("llc-ppp", llc_ppp), ("gfp", gfp),
    ("docsis", docsis), ("wlan", wlan), ("aal5", aal5))}


def name_of(layer):
    return layer if isinstance(layer, str) else next(iter(layer))


def options_of(layer):
    return {} if isinstance(layer, str) else layer[name_of(layer)]


def encode(stack, payload):
    """[octets of the packet as it is at each layer, lowest first]."""
    names = [name_of(layer) for layer in stack]
    packet, built = Raw(payload), []
    for i in reversed(range(len(stack))):
        packet = ENCODERS[names[i]](packet, options_of(stack[i]), names[:i])
        built.insert(0, bytes(packet))
    return built
