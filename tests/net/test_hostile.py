# SPDX-License-Identifier: GPL-3.0-or-later
"""Garbage on the control port and strangers on the data port: the agent closes
them, lives on and serves."""
import contextlib
import os
import select
import socket
import ssl
import struct
import threading
import time

import certificates
import harness

UNDECIDED = 2		# one trial alone decides nothing
CLOSED_S = 30		# an agent gives a silent peer ten seconds at most
GREETING_MARK = b"PLAFOND\x01"	# before the 16 bytes of a token
HELLO = (b'{"type":"hello","protocol":1,"role":"controller","software":"x",'
         b'"name":"y","beat_ns":250000000}')


def frame(text):
    return struct.pack(">I", len(text)) + text


def plain_connection(bed, port=harness.CONTROL_PORT):
    """TCP from host b to a's agent."""
    with bed.b.inside():
        return socket.create_connection((harness.A4, port), CLOSED_S)


def tls_connection(bed, identity=None):
    """TLS to a's agent as the controller, or with another identity file."""
    context = ssl.SSLContext(ssl.PROTOCOL_TLS_CLIENT)
    context.check_hostname = False
    context.verify_mode = ssl.CERT_NONE
    if identity != "none":
        context.load_cert_chain(identity or bed.state / "identity.pem")
    return context.wrap_socket(plain_connection(bed))


def closes(peer):
    """The agent ends the connection; whatever it says before is read."""
    with peer, contextlib.suppress(ConnectionError, ssl.SSLError):
        while peer.recv(65536):
            pass


def send(peer, data):
    with contextlib.suppress(ConnectionError, ssl.SSLError):
        peer.sendall(data)


@contextlib.contextmanager
def agent_that_survives():
    with harness.shaped_bed() as bed:
        bed.identity		# makes the controller's identity file
        yield bed
        bed.agent("a").lives()
        process = bed.controller("ready", bed.declaration())
        assert process.wait() == 0, process.tail()


def test_bytes_that_are_no_tls():
    with agent_that_survives() as bed:
        for data in (b"GET / HTTP/1.0\r\n\r\n", os.urandom(4096), bytes(4096),
                     b"\x16\x03\x01\xff\xff" + os.urandom(200)):
            peer = plain_connection(bed)
            send(peer, data)
            closes(peer)


def test_connection_that_says_nothing_is_closed():
    with agent_that_survives() as bed:
        closes(plain_connection(bed))


def test_connections_cut_at_every_early_moment():
    with agent_that_survives() as bed:
        for cut in range(0, 32):
            with tls_connection(bed) as peer:
                send(peer, frame(HELLO)[:cut])


def test_peer_without_certificate():
    with agent_that_survives() as bed:
        with contextlib.suppress(ConnectionError, ssl.SSLError):
            peer = tls_connection(bed, "none")
            send(peer, frame(HELLO))
            closes(peer)


def test_stranger_with_a_certificate_of_its_own():
    with agent_that_survives() as bed:
        identity = bed.folder / "stranger" / "identity.pem"
        certificates.Authority(bed.folder / "authority").identity(
            identity, "stranger")
        peer = tls_connection(bed, identity)
        send(peer, frame(HELLO))
        closes(peer)


BAD_FRAMES = (
    ("length zero", struct.pack(">I", 0)),
    ("one byte too long", struct.pack(">I", 1024 * 1024 + 1) + b"{"),
    ("the longest length", b"\xff\xff\xff\xff" + b"{" * 4096),
    ("no JSON", frame(b"hello")),
    ("no object", frame(b"[1, 2]")),
    ("no UTF-8", frame(b'{"type":"\xff\xfe"}')),
    ("no type", frame(b"{}")),
    ("unknown type", frame(b'{"type":"sesame"}')),
    ("type of another kind", frame(b'{"type":7}')),
    ("deep", frame(b'{"type":' + b"[" * 5000 + b"]" * 5000 + b"}")),
    ("twice the same member", frame(b'{"type":"hello","type":"hello"}')),
    ("integer beyond 2^53", frame(
        HELLO.replace(b"250000000", b"9007199254740993"))),
    ("member missing", frame(b'{"type":"hello"}')),
    ("trailing text", frame(HELLO + b"x")),
    ("NUL", frame(HELLO.replace(b'"x"', b'"\\u0000"'))),
    ("a megabyte of text", frame(
        HELLO.replace(b'"x"', b'"' + b"x" * 1000000 + b'"'))),
    ("another version", frame(HELLO.replace(b'"protocol":1',
                                            b'"protocol":99'))),
)


def test_bad_first_frames():
    with agent_that_survives() as bed:
        for what, data in BAD_FRAMES:
            print(what, flush=True)
            peer = tls_connection(bed)
            send(peer, data)
            closes(peer)


BAD_SECOND = (
    b'{"type":"start","peer":"198.18.0.2","peer_port":1,"tokens":[]}',
    b'{"type":"measurement-received"}',
    b'{"type":"rows-received","number":7}',
    b'{"type":"ready"}',
    b'{"type":"prepare"}',
    b'{"type":"prepare","sesame":1}',
    HELLO,
)


def test_messages_out_of_turn():
    with agent_that_survives() as bed:
        for text in BAD_SECOND:
            print(text, flush=True)
            peer = tls_connection(bed)
            send(peer, frame(HELLO) + frame(text))
            closes(peer)


def test_many_silent_connections_do_no_lasting_harm():
    with agent_that_survives() as bed:
        peers = [plain_connection(bed) for _ in range(100)]
        time.sleep(0.5)
        bed.agent("a").lives()
        for peer in peers:
            peer.close()


def test_data_port_without_a_token():
    with agent_that_survives() as bed:
        for data in (b"", os.urandom(16), os.urandom(64), bytes(4096),
                     GREETING_MARK + os.urandom(16)):
            try:
                peer = plain_connection(bed, harness.DATA_PORT)
            except ConnectionError:
                continue	# closed while no trial is prepared: as good
            send(peer, data)
            closes(peer)


class FirstBytes(threading.Thread):
    """Watch a host's interface and keep the first bytes that anybody sends
    to the data port."""

    def __init__(self, host):
        super().__init__(daemon=True)
        with host.inside():
            self.socket = socket.socket(socket.AF_PACKET, socket.SOCK_RAW,
                                        socket.htons(0x0800))
        self.found = None
        self.start()

    def run(self):
        while self.found is None:
            packet = self.socket.recv(65536)
            header = 14 + (packet[14] & 15) * 4
            if packet[23] != socket.IPPROTO_TCP:
                continue
            port = struct.unpack(">H", packet[header + 2:header + 4])[0]
            payload = packet[header + (packet[header + 12] >> 4) * 4:
                             14 + struct.unpack(">H", packet[16:18])[0]]
            if port == harness.DATA_PORT and payload:
                self.found = payload


def test_used_token_opens_nothing():
    with harness.shaped_bed() as bed:
        watch = FirstBytes(bed.b)
        process = bed.controller("accept", "--format", "json",
                                 bed.declaration(plan={"duration": "5 s"}))
        bed.mid_trial(process)
        harness.wait_for(lambda: watch.found, "the token on the data port")
        with bed.a.inside():
            try:
                peer = socket.create_connection(
                    (harness.B4, harness.DATA_PORT), CLOSED_S)
            except ConnectionError:
                peer = None
        if peer:
            send(peer, watch.found)
            closes(peer)
        # The trial goes on undisturbed, with its one stream.
        assert process.wait() == UNDECIDED, process.tail()
        record = harness.json.loads(process.stdout)
        assert record["trials"][0]["streams"] == 1
        bed.agent("b").lives()


def test_stranger_on_the_data_port_does_not_disturb_a_trial():
    with harness.shaped_bed() as bed:
        process = bed.controller("accept", "--format", "json",
                                 bed.declaration(plan={"duration": "4 s"}))
        bed.mid_trial(process)
        for _ in range(20):
            with bed.a.inside(), contextlib.suppress(ConnectionError):
                with socket.create_connection(
                        (harness.B4, harness.DATA_PORT), CLOSED_S) as peer:
                    send(peer, GREETING_MARK + os.urandom(16))
                    select.select([peer], [], [], 0.05)
        assert process.wait() == UNDECIDED, process.tail()
