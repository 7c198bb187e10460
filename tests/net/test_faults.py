# SPDX-License-Identifier: GPL-3.0-or-later
"""What breaks while a task runs: nothing hangs, nothing is lost, and the
message says what it was."""
import pathlib
import signal
import socket
import ssl
import struct
import threading
import time

import certificates
import harness

UNDECIDED, VOID = 2, 3
LONG_PLAN = {"trials": 2, "duration": "20 s"}	# killed long before its end


def test_absent_agent_is_named_within_ten_seconds():
    with harness.shaped_bed(agents=False) as bed:
        bed.agent("a").start(bed.policy(harness.A4))
        path = bed.declaration()
        # Ten seconds are the requirement; five more are for starting the
        # program and ending it on a slow machine.
        bed.refused("accept", path, status=69, limit_s=15,
                    says=["mast", r"198\.18\.0\.2:61741"])


def test_silent_address_is_named_within_ten_seconds():
    with harness.shaped_bed(agents=False) as bed:
        bed.agent("a").start(bed.policy(harness.A4))
        path = bed.declaration(ends={"b": {
            "control": f"{harness.NOBODY4}:61741"}})
        bed.refused("accept", path, status=69, limit_s=15,
                    says=["mast", r"198\.18\.0\.77:61741"])


def test_silent_listener_is_named_within_ten_seconds():
    with harness.shaped_bed(agents=False) as bed:
        bed.agent("a").start(bed.policy(harness.A4))
        with bed.b.inside():
            listener = socket.create_server((harness.B4, 61741))
        with listener:
            bed.refused("accept", bed.declaration(), status=69, limit_s=15,
                        says=["mast"])


def other_version(listener, context):
    """Take one connection after the other and say hello as version 99."""
    hello = (b'{"type":"hello","protocol":99,"role":"agent","software":"x",'
             b'"name":"mast","beat_ns":250000000}')
    while True:
        try:
            taken, _ = listener.accept()
        except OSError:
            return		# closed: the test is over
        try:
            with context.wrap_socket(taken, server_side=True) as peer:
                peer.sendall(struct.pack(">I", len(hello)) + hello)
                while peer.recv(4096):
                    pass
        except OSError:
            pass		# the controller went away, as it should


def test_agent_of_another_version_is_unreachable():
    with harness.shaped_bed(agents=False) as bed:
        bed.agent("a").start(bed.policy(harness.A4))
        identity = bed.agent("b").state / "identity.pem"
        pin = certificates.Authority(bed.folder / "authority").identity(
            identity, "mast")
        context = ssl.SSLContext(ssl.PROTOCOL_TLS_SERVER)
        context.load_cert_chain(identity)
        with bed.b.inside():
            listener = socket.create_server((harness.B4, 61741))
        threading.Thread(target=other_version, args=(listener, context),
                         daemon=True).start()
        path = bed.declaration(ends={"b": {"identity": pin}})
        bed.refused("accept", path, status=69, says=["mast", "99", "version"])
        listener.shutdown(socket.SHUT_RDWR)
        listener.close()


def stands_still(host):
    """Kernel's counter over one second, less than any load: 20 Mbit/s would
    be 2.5 MB, and closing connections takes a few packets."""
    before = host.counter_bytes("wire", "tx")
    time.sleep(1)
    return host.counter_bytes("wire", "tx") - before < 50_000


def test_killed_controller_stops_the_load_within_two_seconds():
    with harness.shaped_bed() as bed:
        process = bed.controller("accept", bed.declaration(plan=LONG_PLAN))
        bed.mid_trial(process)
        assert not stands_still(bed.a), "there was no load to stop"
        process.kill()
        # Two seconds are the requirement.  A slow machine only looks later.
        time.sleep(2)
        assert stands_still(bed.a), "load goes on without a controller"
        bed.accept(bed.declaration(), status=UNDECIDED)


def killed_agent(end):
    with harness.shaped_bed() as bed:
        process = bed.controller("accept", bed.declaration(plan=LONG_PLAN))
        bed.mid_trial(process)
        time.sleep(2)		# so that some rows are there to be kept
        bed.agent(end).process.kill()
        assert process.wait() == VOID, process.tail()
        record = bed.kept_records()[-1]
        harness.check_record(record)
        assert record["verdict"]["outcome"] == "void"
        assert bed.agent(end).name in str(record["verdict"]["reasons"])
        assert record["trials"], "what was measured is lost"
        other = bed.agent("b" if end == "a" else "a")
        other.lives()
        assert stands_still(bed.a)
        bed.agent(end).start(bed.policy(
            harness.A4 if end == "a" else harness.B4))
        bed.accept(bed.declaration(), status=UNDECIDED)


def test_killed_sender_makes_void_and_keeps_what_was_measured():
    killed_agent("a")


def test_killed_receiver_makes_void_and_keeps_what_was_measured():
    killed_agent("b")


def test_link_cut_mid_trial_makes_void():
    with harness.shaped_bed() as bed:
        process = bed.controller("accept", bed.declaration(plan=LONG_PLAN))
        bed.mid_trial(process)
        bed.b.run("ip", "link", "set", "wire", "down")
        # Silence is noticed within ten seconds by the stated rule.
        assert process.wait(60) == VOID, process.tail()
        record = bed.kept_records()[-1]
        assert record["verdict"]["outcome"] == "void"
        bed.b.run("ip", "link", "set", "wire", "up")
        bed.b.run("ip", "address", "replace", f"{harness.B6}/64", "dev",
                  "wire", "nodad")
        harness.wait_for(lambda: bed.controller(
            "ready", bed.declaration()).wait() == 0, "both agents to be idle")


def interrupted(number):
    with harness.shaped_bed() as bed:
        process = bed.controller("accept", "--format", "json",
                                 bed.declaration(plan=LONG_PLAN))
        bed.mid_trial(process)
        process.signal(number)
        assert process.wait() == VOID, process.tail()
        record = bed.kept_records()[-1]
        harness.check_record(record)
        assert record["verdict"]["outcome"] == "void"
        assert "interrupt" in str(record["verdict"]["reasons"])
        harness.wait_for(lambda: stands_still(bed.a), "the load to stop")
        bed.accept(bed.declaration(), status=UNDECIDED)


def test_interrupt_keeps_a_void_record_and_frees_the_agents():
    interrupted(signal.SIGINT)


def test_termination_keeps_a_void_record_and_frees_the_agents():
    interrupted(signal.SIGTERM)


def test_control_port_in_use_is_said():
    with harness.shaped_bed(agents=False) as bed:
        with bed.a.inside():
            holder = socket.create_server((harness.A4, 61741))
        with holder:
            agent = bed.agent("a").start(bed.policy(harness.A4), wait=False)
            status = agent.process.wait()
            assert status not in (0, 1), agent.process.tail()
            for word in ("61741", "in use"):
                assert word in agent.process.stderr, agent.process.tail()


def test_data_port_in_use_is_said():
    with harness.shaped_bed() as bed:
        with bed.b.inside():
            holder = socket.create_server((harness.B4, 61742))
        with holder:
            # The port is taken when a trial is prepared, not before.
            process = bed.controller("accept", bed.declaration())
            assert process.wait() >= 64, process.tail()
            for word in ("mast", "61742", "in use"):
                assert word in process.stderr, process.tail()
        bed.accept(bed.declaration(), status=UNDECIDED)


def test_port_for_calls_in_use_is_said():
    with harness.shaped_bed() as bed:
        path = bed.declaration(ends={"b": {"control": "called"}})
        calls = f"{harness.A4}:{harness.CONTROL_PORT}"
        process = bed.controller("accept", "--listen", calls, path)
        assert process.wait() >= 64, process.tail()
        for word in ("61741", "in use"):
            assert word in process.stderr, process.tail()


def test_full_disk_is_said_and_the_report_still_comes():
    with harness.shaped_bed(agents=False) as bed:
        # A disk of 64 KiB for the controller's state; mounted in this test's
        # own mount namespace.
        bed.state.mkdir()
        harness.run(["mount", "-t", "tmpfs", "-o", "size=64k,mode=700",
                     "tmpfs", bed.state])
        bed.start_agents()
        fill(bed.state / "ballast")
        process = bed.controller("accept", bed.declaration())
        assert process.wait() == 73, process.tail()
        assert "No space left" in process.stderr, process.tail()
        assert "LINK-01" in process.stdout, "the result is lost"
        assert not list((bed.state / "records").glob("*.json"))


def fill(path):
    """Write until the disk is full."""
    with open(path, "wb", buffering=0) as file:
        try:
            while file.write(bytes(1024)):
                pass
        except OSError:
            pass


def test_full_disk_of_the_output_file_is_said():
    with harness.shaped_bed() as bed:
        full = bed.folder / "full"
        full.mkdir()
        harness.run(["mount", "-t", "tmpfs", "-o", "size=16k", "tmpfs", full])
        fill(full / "ballast")
        process = bed.controller("accept", "--format", "json", "-o",
                                 full / "record.json", bed.declaration())
        assert process.wait() == 73, process.tail()
        assert [path.name for path in full.iterdir()] == ["ballast"]
        assert len(bed.kept_records()) == 1


def test_full_standard_output_is_said():
    with harness.shaped_bed() as bed:
        process = bed.controller("accept", "--format", "json",
                                 bed.declaration(),
                                 stdout=open("/dev/full", "wb"))
        assert process.wait() == 73, process.tail()
        assert len(bed.kept_records()) == 1


def test_unwritable_output_folder_is_said_before_the_trials():
    with harness.shaped_bed() as bed:
        process = bed.controller("accept", "-o",
                                 pathlib.Path("/proc/nowhere/record"),
                                 bed.declaration())
        assert process.wait() == 73, process.tail()
