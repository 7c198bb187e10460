# SPDX-License-Identifier: GPL-3.0-or-later
"""Frames of a real transfer between two hosts, as an interface sees them."""
import concurrent.futures
import socket
import threading

PORT = 61800
# Of the kernel's headers if_ether.h, if_packet.h, asm-generic/socket.h.
ETH_P_ALL, PACKET_OUTGOING, SO_RCVBUFFORCE = 3, 4, 33
BUFFER_BYTES = 16 << 20


class Capture:
    """Frames that an interface of a host receives, through AF_PACKET."""

    def __init__(self, host, interface):
        with host.inside():
            self.socket = socket.socket(socket.AF_PACKET, socket.SOCK_RAW,
                                        socket.htons(ETH_P_ALL))
        self.socket.bind((interface, 0))
        self.socket.setsockopt(socket.SOL_SOCKET, SO_RCVBUFFORCE, BUFFER_BYTES)
        self.socket.settimeout(0.2)
        self.frames, self.stopped = [], False
        self.thread = threading.Thread(target=self.collect)
        self.thread.start()

    def collect(self):
        while True:
            try:
                frame, address = self.socket.recvfrom(65536)
                if address[2] != PACKET_OUTGOING:
                    self.frames.append(frame)
            except TimeoutError:
                if self.stopped:
                    return

    def stop(self):
        self.stopped = True
        self.thread.join()
        self.socket.close()
        return self.frames


def during(host, interface, act):
    """Frames received while act() runs."""
    running = Capture(host, interface)
    try:
        act()
    finally:
        frames = running.stop()
    return frames


def transfer(a, b, address, octets, wrap=(lambda end: end,) * 2):
    """So many octets over TCP from host a to host b.  `wrap` makes more of the
    socket of the sender and of the receiver, at the same time: a handshake
    needs both."""
    with b.inside():
        listener = socket.create_server((address, PORT))
    with a.inside():
        outgoing = socket.create_connection((address, PORT))
    incoming, _ = listener.accept()

    def send():
        with wrap[0](outgoing) as sender:
            sender.sendall(b"x" * octets)
            # Tickets of TLS that nobody read would make a close a reset.
            sender.shutdown(socket.SHUT_WR)
            while sender.recv(1 << 16):
                pass

    with listener, concurrent.futures.ThreadPoolExecutor(1) as pool:
        sending = pool.submit(send)
        got = 0
        with wrap[1](incoming) as receiver:
            while True:
                more = len(receiver.recv(1 << 16))
                got += more
                if not more:
                    break
        sending.result()
    assert got == octets, got
