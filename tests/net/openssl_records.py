# SPDX-License-Identifier: GPL-3.0-or-later
"""Records that OpenSSL's own libssl makes, in memory, without any network.

ctypes and not the module ssl: that has neither DTLS nor a choice of the
ciphers of TLS 1.3 nor of the order of encryption and MAC.
"""
import ctypes
import pathlib
import struct

import harness

CTRL_SET_MTU = 17		# of include/openssl/ssl.h, here and below
CTRL_SET_MIN_PROTOCOL, CTRL_SET_MAX_PROTOCOL = 123, 124
OP_NO_QUERY_MTU = 1 << 12
OP_NO_ENCRYPT_THEN_MAC = 1 << 19
FILETYPE_PEM = 1
PROTOCOLS = {"1.2": 0x0303, "1.3": 0x0304, "dtls-1.2": 0xfefd}
DATAGRAM_BYTES_MAX = 65000


def library():
    """libssl with the types of what is called of it."""
    lib = ctypes.CDLL("libssl.so.3")
    pointer, word = ctypes.c_void_p, ctypes.c_int
    for name, result, arguments in (
            ("TLS_method", pointer, []), ("DTLS_method", pointer, []),
            ("SSL_CTX_new", pointer, [pointer]),
            ("SSL_CTX_free", None, [pointer]),
            ("SSL_CTX_ctrl", ctypes.c_long,
             [pointer, word, ctypes.c_long, pointer]),
            ("SSL_CTX_set_options", ctypes.c_uint64,
             [pointer, ctypes.c_uint64]),
            ("SSL_CTX_set_cipher_list", word, [pointer, ctypes.c_char_p]),
            ("SSL_CTX_set_ciphersuites", word, [pointer, ctypes.c_char_p]),
            ("SSL_CTX_use_certificate_file", word,
             [pointer, ctypes.c_char_p, word]),
            ("SSL_CTX_use_PrivateKey_file", word,
             [pointer, ctypes.c_char_p, word]),
            ("SSL_new", pointer, [pointer]), ("SSL_free", None, [pointer]),
            ("SSL_ctrl", ctypes.c_long,
             [pointer, word, ctypes.c_long, pointer]),
            ("SSL_set_bio", None, [pointer, pointer, pointer]),
            ("SSL_set_accept_state", None, [pointer]),
            ("SSL_set_connect_state", None, [pointer]),
            ("SSL_do_handshake", word, [pointer]),
            ("SSL_get_current_cipher", pointer, [pointer]),
            ("SSL_CIPHER_get_name", ctypes.c_char_p, [pointer]),
            ("SSL_write", word, [pointer, ctypes.c_char_p, word]),
            ("SSL_read", word, [pointer, ctypes.c_char_p, word])):
        function = getattr(lib, name)
        function.restype, function.argtypes = result, arguments
    return lib


def crypto():
    lib = ctypes.CDLL("libcrypto.so.3")
    pointer, word = ctypes.c_void_p, ctypes.c_int
    for name, result, arguments in (
            ("BIO_s_mem", pointer, []), ("BIO_new", pointer, [pointer]),
            ("BIO_ctrl_pending", ctypes.c_size_t, [pointer]),
            ("BIO_read", word, [pointer, ctypes.c_char_p, word]),
            ("BIO_write", word, [pointer, ctypes.c_char_p, word])):
        function = getattr(lib, name)
        function.restype, function.argtypes = result, arguments
    return lib


def make_certificate(folder):
    """A key and its self-signed certificate; the folder has both."""
    folder = pathlib.Path(folder)
    harness.run(["openssl", "req", "-x509", "-newkey", "ec", "-pkeyopt",
                 "ec_paramgen_curve:P-256", "-nodes", "-days", "2", "-subj",
                 "/CN=test", "-keyout", folder / "key.pem", "-out",
                 folder / "certificate.pem"])
    return folder


class Pair:
    """A client and a server after their handshake."""

    def __init__(self, folder, version, suite, encrypt_then_mac=True):
        self.ssl, self.bio = library(), crypto()
        self.datagrams = version.startswith("dtls")
        self.context = self.make_context(folder, PROTOCOLS[version], suite,
                                         encrypt_then_mac)
        self.ends = [self.make_end(server) for server in (False, True)]
        for _ in range(10):
            for i in (0, 1):
                self.ssl.SSL_do_handshake(self.ends[i][0])
                self.deliver(i)
        # Tickets of TLS 1.3 are not application data.
        for end in self.ends:
            self.ssl.SSL_read(end[0], ctypes.create_string_buffer(1), 1)
        self.drain(0)
        cipher = self.ssl.SSL_get_current_cipher(self.ends[0][0])
        assert cipher, f"no handshake with {version} {suite}"
        self.cipher = self.ssl.SSL_CIPHER_get_name(cipher).decode()
        assert self.cipher == suite, f"{self.cipher}, wanted {suite}"

    def make_context(self, folder, protocol, suite, encrypt_then_mac):
        method = self.ssl.DTLS_method() if self.datagrams else \
            self.ssl.TLS_method()
        context = self.ssl.SSL_CTX_new(method)
        for control in (CTRL_SET_MIN_PROTOCOL, CTRL_SET_MAX_PROTOCOL):
            assert self.ssl.SSL_CTX_ctrl(context, control, protocol, None)
        if not encrypt_then_mac:
            self.ssl.SSL_CTX_set_options(context, OP_NO_ENCRYPT_THEN_MAC)
        self.ssl.SSL_CTX_set_options(context, OP_NO_QUERY_MTU)
        # Level 0 lets the 8-octet tag of CCM-8 pass.
        choose = self.ssl.SSL_CTX_set_ciphersuites \
            if suite.startswith("TLS_") else self.ssl.SSL_CTX_set_cipher_list
        words = suite if suite.startswith("TLS_") else suite + ":@SECLEVEL=0"
        assert choose(context, words.encode()) == 1, f"no {suite} in libssl"
        if suite.startswith("TLS_"):
            self.ssl.SSL_CTX_set_cipher_list(context, b"ALL:@SECLEVEL=0")
        for use, name in ((self.ssl.SSL_CTX_use_certificate_file,
                           "certificate.pem"),
                          (self.ssl.SSL_CTX_use_PrivateKey_file, "key.pem")):
            assert use(context, bytes(folder / name), FILETYPE_PEM) == 1
        return context

    def make_end(self, server):
        """(SSL, what it reads, what it writes); SSL owns the two."""
        ssl = self.ssl.SSL_new(self.context)
        reads, writes = (self.bio.BIO_new(self.bio.BIO_s_mem())
                         for _ in range(2))
        self.ssl.SSL_set_bio(ssl, reads, writes)
        if self.datagrams:
            self.ssl.SSL_ctrl(ssl, CTRL_SET_MTU, DATAGRAM_BYTES_MAX, None)
        (self.ssl.SSL_set_accept_state if server else
         self.ssl.SSL_set_connect_state)(ssl)
        return ssl, reads, writes

    def drain(self, end):
        """What this end wrote so far."""
        writes = self.ends[end][2]
        pending = self.bio.BIO_ctrl_pending(writes)
        if not pending:
            return b""
        buffer = ctypes.create_string_buffer(pending)
        assert self.bio.BIO_read(writes, buffer, pending) == pending
        return buffer.raw

    def deliver(self, end):
        octets = self.drain(end)
        if octets:
            assert self.bio.BIO_write(self.ends[1 - end][1], octets,
                                      len(octets)) == len(octets)

    def write(self, payload):
        """The records that one write of the client makes."""
        assert self.ssl.SSL_write(self.ends[0][0], payload,
                                  len(payload)) == len(payload)
        return split(self.drain(0), self.datagrams)

    def close(self):
        for ssl, _, _ in self.ends:
            self.ssl.SSL_free(ssl)
        self.ssl.SSL_CTX_free(self.context)


def split(octets, datagrams):
    """Octets as whole records: the header ends in the length of the rest
    (RFC 8446 section 5.1, RFC 6347 section 4.1)."""
    header = 13 if datagrams else 5
    records = []
    while octets:
        length, = struct.unpack("!H", octets[header - 2:header])
        records.append(octets[:header + length])
        assert len(records[-1]) == header + length and octets[0] == 23
        octets = octets[header + length:]
    return records
