# SPDX-License-Identifier: GPL-3.0-or-later
"""What tshark makes of packets: capture files out, decoded fields in."""
import csv
import io
import os
import pathlib
import shutil
import struct
import subprocess

import harness

# Link types of capture files (the public registry of them, "LINKTYPE_").
ETHERNET, PPP, RAW_IP, PPP_HDLC = 1, 9, 101, 50
FRAME_RELAY, ATM_RFC1483, IEEE802_11 = 107, 100, 105
DOCSIS, GFP_F = 143, 171

# Decoded as they are, never as parts of a conversation.
PREFERENCES = ["tcp.analyze_sequence_numbers:FALSE",
               "tcp.desegment_tcp_streams:FALSE", "ip.defragment:FALSE"]


def write_capture(path, link_type, packets):
    """A classic capture file; all at time 0."""
    with open(path, "wb") as out:
        out.write(struct.pack("<IHHiIII", 0xa1b2c3d4, 2, 4, 0, 0, 262144,
                              link_type))
        for packet in packets:
            out.write(struct.pack("<IIII", 0, 0, len(packet), len(packet)))
            out.write(packet)


def decode(folder, link_type, packets, fields, preferences=(), decode_as=()):
    """One {field: [values]} a packet."""
    if not shutil.which("tshark"):
        raise harness.Skip("tshark is not installed")
    folder = pathlib.Path(folder)
    path = folder / f"decode-{link_type}.pcap"
    write_capture(path, link_type, packets)
    words = ["tshark", "-n", "-r", path, "-T", "fields", "-E", "separator=,",
             "-E", "quote=d", "-E", "occurrence=a", "-E", "aggregator=;"]
    for preference in [*PREFERENCES, *preferences]:
        words += ["-o", preference]
    for rule in decode_as:
        words += ["-d", rule]
    # A line without any field would be an empty line.
    fields = ["frame.number", *fields]
    for field in fields:
        words += ["-e", field]
    # No settings of whoever runs this.
    settings = {**os.environ, "HOME": str(folder), "LC_ALL": "C.UTF-8",
                "XDG_CONFIG_HOME": str(folder)}
    done = subprocess.run([str(word) for word in words], text=True,
                          stdin=subprocess.DEVNULL, capture_output=True,
                          env=settings)
    assert done.returncode == 0, f"tshark: {done.stderr}"
    rows = [{field: cell.split(";") if cell else []
             for field, cell in zip(fields, row)}
            for row in csv.reader(io.StringIO(done.stdout))]
    assert len(rows) == len(packets), \
        f"tshark: {len(rows)} of {len(packets)} packets\n{done.stderr}"
    return rows
