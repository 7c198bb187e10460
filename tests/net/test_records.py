# SPDX-License-Identifier: GPL-3.0-or-later
"""Records of TLS, DTLS and QUIC against what OpenSSL and others seal.

Growth: libssl writes records of many sizes in memory; each must be longer than
its content by what the program says.  Average: a real TCP connection carries
TLS over a veth; over its full segments the payload of a segment must be the
program's mean, records that straddle segments included.

DTLS 1.3 is in no OpenSSL of Debian 12: nothing here builds it.  The QUIC packet
is sealed here as RFC 9001 says, and the same code first makes the packet that
its appendix A.5 prints.
"""
import ssl
import struct
import tempfile

from cryptography.hazmat.primitives.ciphers import Cipher, aead, algorithms

import capture
import dissect
import harness
import ladder
import openssl_records

GIGABIT = {"kind": "ethernet", "line-rate": "1 Gbit/s"}
STREAM, LINE = 1448, 1538	# of TCP with timestamps in 1500 octets
# Every place in a cipher's block, from the smallest and to the largest record.
SWEEPS = ["1 B..40 B:1 B", "100 B..1600 B:100 B", "16345 B..16384 B:1 B"]

# Version and options as declared; the same for libssl: version, suite, whether
# encryption comes before the MAC.
TLS = [
    ("1.3", {"cipher": "aes-gcm"}, "TLS_AES_128_GCM_SHA256", True),
    ("1.3", {"cipher": "aes-gcm"}, "TLS_AES_256_GCM_SHA384", True),
    ("1.3", {"cipher": "chacha20-poly1305"}, "TLS_CHACHA20_POLY1305_SHA256",
     True),
    ("1.3", {"cipher": "aes-ccm-8"}, "TLS_AES_128_CCM_8_SHA256", True),
    ("1.2", {"cipher": "aes-gcm"}, "ECDHE-ECDSA-AES128-GCM-SHA256", True),
    ("1.2", {"cipher": "chacha20-poly1305"}, "ECDHE-ECDSA-CHACHA20-POLY1305",
     True),
    ("1.2", {"cipher": "aes-ccm-8"}, "ECDHE-ECDSA-AES128-CCM8", True),
    ("1.2", {"cipher": "aes-cbc", "integrity": "hmac-sha1"},
     "ECDHE-ECDSA-AES128-SHA", True),
    ("1.2", {"cipher": "aes-cbc", "integrity": "hmac-sha256"},
     "ECDHE-ECDSA-AES128-SHA256", True),
    ("1.2", {"cipher": "aes-cbc", "integrity": "hmac-sha1",
             "encrypt-then-mac": False}, "ECDHE-ECDSA-AES256-SHA", False),
    ("1.2", {"cipher": "aes-cbc", "integrity": "hmac-sha256",
             "encrypt-then-mac": False}, "ECDHE-ECDSA-AES128-SHA256", False),
]
DTLS = [
    ({"cipher": "aes-gcm"}, "ECDHE-ECDSA-AES128-GCM-SHA256"),
    ({"cipher": "chacha20-poly1305"}, "ECDHE-ECDSA-CHACHA20-POLY1305"),
    ({"cipher": "aes-ccm-8"}, "ECDHE-ECDSA-AES128-CCM8"),
]


def declared(top, **more):
    return {"circuit": "RECORDS-01", "medium": GIGABIT,
            "layers": ["ethernet", "ipv4", *top], **more}


def tls_layers(version, options, record_bytes):
    return ["tcp", {"tls": {"version": version, **options,
                            "record-bytes": f"{record_bytes} B"}}]


@harness.plain
def test_growth_of_tls_records():
    with tempfile.TemporaryDirectory(prefix="plafond-tls-") as folder:
        folder = openssl_records.make_certificate(folder)
        for version, options, suite, first in TLS:
            pair = openssl_records.Pair(folder, version, suite, first)
            jobs = [(declared(tls_layers(version, options, 16384)),
                     f"layers.3.tls.record-bytes={sizes}") for sizes in SWEEPS]
            for point in map(ladder.Point, sum(ladder.sweeps(jobs), [])):
                record, = pair.write(bytes(point.number))
                # The mean over a stream: payload : stream = content : record.
                expected = 10 ** 9 * STREAM * point.number // \
                    (LINE * len(record))
                assert point.bps("payload") == expected, \
                    f"{suite}: a record of {point.number} B is " \
                    f"{len(record)} B, which makes {expected} bit/s of " \
                    f"payload, program {point.bps('payload')}"
            pair.close()


@harness.plain
def test_a_long_write_is_records_of_16384():
    with tempfile.TemporaryDirectory(prefix="plafond-tls-") as folder:
        folder = openssl_records.make_certificate(folder)
        for version, _, suite, first in TLS[:7]:
            pair = openssl_records.Pair(folder, version, suite, first)
            whole, = pair.write(bytes(16384))
            records = pair.write(bytes(65536))
            assert [len(record) for record in records] == [len(whole)] * 4
            pair.close()


@harness.plain
def test_growth_of_dtls_records():
    with tempfile.TemporaryDirectory(prefix="plafond-dtls-") as folder:
        folder = openssl_records.make_certificate(folder)
        for options, suite in DTLS:
            pair = openssl_records.Pair(folder, "dtls-1.2", suite)
            said = ladder.ladders([(declared(
                ["udp", {"dtls": {"version": "1.2", **options}}]),
                ["--set", f"mtu={mtu} B"]) for mtu in (576, *range(1480, 1501),
                                                       9000)])
            for one in said:
                record, = pair.write(bytes(int(one.payload)))
                datagram = one.levels["segment"] - 8
                assert len(record) == datagram, \
                    f"{suite}: {one.payload} B make {len(record)} B, " \
                    f"program {datagram} B"
            pair.close()


def quic_seal(key, iv, hp, dcid, number, number_bytes, payload):
    """A 1-RTT packet with ChaCha20-Poly1305: RFC 9001 sections 5.3, 5.4."""
    head = bytes([0x40 | number_bytes - 1]) + dcid + \
        number.to_bytes(8, "big")[-number_bytes:]
    nonce = (int.from_bytes(iv, "big") ^ number).to_bytes(12, "big")
    sealed = aead.ChaCha20Poly1305(key).encrypt(nonce, payload, head)
    sample = sealed[4 - number_bytes:20 - number_bytes]
    mask = Cipher(algorithms.ChaCha20(hp, sample), None).encryptor().update(
        bytes(5))
    at = 1 + len(dcid)
    return bytes([head[0] ^ mask[0] & 0x1f]) + dcid + bytes(
        a ^ b for a, b in zip(head[at:], mask[1:])) + sealed


# RFC 9001 appendix A.5
QUIC_KEY = bytes.fromhex("c6d98ff3441c3fe1b2182094f69caa2e"
                         "d4b716b65488960a7a984979fb23e1c8")
QUIC_IV = bytes.fromhex("e0459b3474bdd0e44a41c144")
QUIC_HP = bytes.fromhex("25a282b9e82f06f21f488917a4fc8f1b"
                        "73573685608597d0efcb076b0ab7a7a4")
QUIC_PACKET = bytes.fromhex("4cfe4189655e5cd55c41f69080575d7999c25a5bfb")


def variable(value, octets):
    """An integer in so many octets: RFC 9000 section 16."""
    if not octets:
        return b""
    return (value | (octets.bit_length() - 1) << 8 * octets - 2).to_bytes(
        octets, "big")


@harness.plain
def test_quic_packets():
    assert quic_seal(QUIC_KEY, QUIC_IV, QUIC_HP, b"", 654360564, 3,
                     b"\x01") == QUIC_PACKET
    for dcid, number, stream, offset, length in (
            (8, 2, 2, 4, 0), (0, 1, 1, 0, 0), (20, 4, 8, 8, 8), (4, 3, 1, 2, 2),
            (8, 2, 4, 4, 2)):
        one, = ladder.ladders([(declared(["udp", {"quic": {
            "connection-id-bytes": f"{dcid} B",
            "packet-number-bytes": f"{number} B",
            "stream-id-bytes": f"{stream} B", "offset-bytes": f"{offset} B",
            "length-bytes": f"{length} B"}}]), [])])
        payload = bytes(int(one.payload))
        # RFC 9000 section 19.8: type, stream, offset, length, data
        frame = bytes([0x08 | 4 * (offset > 0) | 2 * (length > 0)]) + \
            variable(4, stream) + variable(0, offset) + \
            variable(len(payload) if length else 0, length) + payload
        packet = quic_seal(QUIC_KEY, QUIC_IV, QUIC_HP, bytes(dcid), 7, number,
                           frame)
        assert len(packet) == one.levels["segment"] - 8, \
            f"{len(packet)} B, program {one.levels['segment'] - 8} B"


# A real connection

TRANSFER_BYTES = 3_000_000
VERSIONS = {"1.2": ssl.TLSVersion.TLSv1_2, "1.3": ssl.TLSVersion.TLSv1_3}


def contexts(folder, version, suite):
    """Of the client, and of the server."""
    made = [ssl.SSLContext(ssl.PROTOCOL_TLS_CLIENT),
            ssl.SSLContext(ssl.PROTOCOL_TLS_SERVER)]
    for context in made:
        context.minimum_version = context.maximum_version = VERSIONS[version]
        if version == "1.2":
            context.set_ciphers(suite)
    made[0].check_hostname, made[0].verify_mode = False, ssl.CERT_NONE
    made[1].load_cert_chain(folder / "certificate.pem", folder / "key.pem")
    return made


def segments_of(frames):
    """[(frame octets, TCP payload)], in the order of the stream."""
    segments = {}
    for frame in frames:
        at = 14 + 4 * (frame[14] & 15)
        if frame[12:14] != b"\x08\x00" or frame[23] != 6:
            continue
        end = 14 + struct.unpack("!H", frame[16:18])[0]
        sequence, = struct.unpack("!I", frame[at + 4:at + 8])
        payload = frame[at + 4 * (frame[at + 12] >> 4):end]
        if payload:
            segments.setdefault(sequence, (len(frame), payload))
    base = next(iter(segments))
    return [segments[sequence] for sequence in sorted(
        segments, key=lambda sequence: sequence - base & 0xffffffff)]


def overhead_marks(stream, growth):
    """A 1 for each octet of the stream that is no payload; the whole of a
    record that is not a full one of application data is None."""
    marks, at = [], 0
    while at < len(stream):
        length = 5 + int.from_bytes(stream[at + 3:at + 5], "big")
        full = stream[at] == 23 and length == 16384 + growth
        marks += [1] * growth + [0] * 16384 if full else [None] * length
        at += length
    assert at == len(stream)
    return marks


def check_mean(segments, growth, one):
    """Over each run of full segments that carry nothing else: how long a run
    is depends on how the sender was woken."""
    marks = overhead_marks(b"".join(part for _, part in segments), growth)
    at, runs = 0, [[]]
    for octets, part in segments:
        own = marks[at:at + len(part)]
        at += len(part)
        if len(part) != STREAM or None in own:
            runs.append([])
            continue
        assert octets == one.levels["frame-without-fcs"]
        runs[-1].append(len(part) - sum(own))
    for run in runs:
        # At each end the overhead of a record may be on either side.
        assert abs(sum(run) - len(run) * one.payload) <= 2 * growth, \
            f"{sum(run)} B in {len(run)} segments, program " \
            f"{one.payload} B each"
    count = sum(map(len, runs))
    assert count >= 500, f"{count} full segments"
    return count, sum(map(sum, runs)) / count


def check_decoded(frames, growth):
    """tshark finds the records, the most of 16384 octets and what is added
    without the header of 5."""
    with tempfile.TemporaryDirectory(prefix="plafond-tls-") as folder:
        rows = dissect.decode(
            folder, dissect.ETHERNET, frames, ["tls.record.length"],
            preferences=["tcp.desegment_tcp_streams:TRUE"],
            decode_as=[f"tcp.port=={capture.PORT},tls"])
    lengths = [int(length) for row in rows
               for length in row["tls.record.length"]]
    full = lengths.count(16384 + growth - 5)
    assert full >= TRANSFER_BYTES // 16384 - 1, \
        f"{full} full records of {len(lengths)}"
    return full


def test_mean_over_the_segments_of_a_connection():
    for version, options, suite, _ in (TLS[0], TLS[4]):
        with harness.bed() as bed:
            bed.link()
            bed.offloads_off()
            made = contexts(openssl_records.make_certificate(bed.folder),
                            version, suite)
            frames = capture.during(bed.b, "wire", lambda: capture.transfer(
                bed.a, bed.b, harness.B4, TRANSFER_BYTES,
                (made[0].wrap_socket, lambda end: made[1].wrap_socket(
                    end, server_side=True))))
        one, = ladder.ladders([(declared(tls_layers(version, options, 16384)),
                                [])])
        growth = {"1.2": 29, "1.3": 22}[version]
        count, mean = check_mean(segments_of(frames), growth, one)
        records = check_decoded(frames, growth)
        print(f"TLS {version}: {mean:.3f} B of payload a segment over {count} "
              f"segments, program {one.payload:.3f} B; {records} full records")
