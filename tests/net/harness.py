# SPDX-License-Identifier: GPL-3.0-or-later
"""What the tests of the real programs share.

Every test runs in network, mount and process namespaces of its own, made by
`unshare` before Python starts anew in them (run_one.py).  When the test ends,
or is killed in whatever way, the kernel ends its processes and takes the
namespaces away: nothing has to be cleaned up by hand.

Limits of time are there to end a test that hangs.  They are ten times and more
what an idle machine needs, so that a slow machine fails no test; where a limit
is itself what is tested, the test says so.
"""
import contextlib
import ctypes
import json
import os
import pathlib
import re
import shutil
import signal
import subprocess
import tempfile
import time

SOURCE = pathlib.Path(__file__).resolve().parents[2]
BUILD = pathlib.Path(os.environ.get("PLAFOND_BUILD",
                                    SOURCE / "build-test")).resolve()
AGENT = BUILD / "plafond-agent"
CONTROLLER = BUILD / "plafond"
SCHEMA = SOURCE / "controller/report/record.schema.json"

CONTROL_PORT = 61741
DATA_PORT = 61742
A4, B4 = "198.18.0.1", "198.18.0.2"		# RFC 2544's addresses
A6, B6 = "2001:2::1", "2001:2::2"		# RFC 5180's addresses
BURST_BYTES = 15140				# of tbf: ten full packets
NOBODY4 = "198.18.0.77"				# no host has it

# Status by which a sanitizer ends a program; no program of ours uses it.
SANITIZER_STATUS = 99
LONG_S = 120		# an end to hanging, never a requirement

OUTCOME_STATUS = {"meets": 0, "falls-short": 1, "undecided": 2, "void": 3}


class Skip(Exception):
    """What this test needs is not there."""


def plain(test):
    """Mark a test that needs no namespaces."""
    test.plain = True
    return test


def namespace_command():
    """Words before a command that runs it in namespaces of its own, or None
    where this machine does not allow that."""
    alone = ["unshare", "--net", "--mount", "--pid", "--fork", "--kill-child",
             "--mount-proc"]
    mapped = ["unshare", "--user", "--map-root-user"] + alone[1:]
    probe = ["unshare", "-n", "true"] if os.geteuid() == 0 else \
        ["unshare", "-Urn", "true"]
    if subprocess.run(probe, capture_output=True).returncode != 0:
        return None
    return alone if os.geteuid() == 0 else mapped


def enter():
    """First steps inside the new namespaces."""
    subprocess.run(["mount", "-t", "tmpfs", "tmpfs", "/run"], check=True)
    os.mkdir("/run/netns")
    # Nobody else sees this /run, and it goes away with the namespaces.
    tempfile.tempdir = "/run"
    subprocess.run(["ip", "link", "set", "lo", "up"], check=True)


def environment(**more):
    """Environment of the programs under test."""
    keep = {"PATH": os.environ["PATH"], "LC_ALL": "C.UTF-8",
            "HOME": "/nonexistent"}
    for name in ("ASAN_OPTIONS", "LSAN_OPTIONS", "UBSAN_OPTIONS"):
        keep[name] = f"exitcode={SANITIZER_STATUS}"
    keep["UBSAN_OPTIONS"] += ":print_stacktrace=1"
    keep.update(more)
    return keep


def wait_for(condition, what, limit_s=LONG_S):
    """Poll until condition() is true and return its value."""
    end = time.monotonic() + limit_s
    while True:
        value = condition()
        if value:
            return value
        if time.monotonic() > end:
            raise AssertionError(f"waited {limit_s} s in vain for {what}")
        time.sleep(0.02)


class Process:
    """A running program whose output goes to files."""

    def __init__(self, argv, folder, label, **options):
        self.label = label
        self.out_path = pathlib.Path(
            tempfile.mkstemp(prefix=f"{label}-out-", dir=folder)[1])
        self.err_path = pathlib.Path(
            tempfile.mkstemp(prefix=f"{label}-err-", dir=folder)[1])
        stdout = options.pop("stdout", None) or open(self.out_path, "wb")
        with stdout, open(self.err_path, "wb") as stderr:
            self.popen = subprocess.Popen(
                [str(word) for word in argv], stdin=subprocess.DEVNULL,
                stdout=stdout, stderr=stderr, env=environment(), **options)
        self.started_s = time.monotonic()

    @property
    def pid(self):
        return self.popen.pid

    @property
    def stdout(self):
        return self.out_path.read_text(errors="replace")

    @property
    def stderr(self):
        return self.err_path.read_text(errors="replace")

    def running(self):
        return self.popen.poll() is None

    def signal(self, number):
        self.popen.send_signal(number)

    def kill(self):
        """SIGKILL, and wait until it is gone."""
        self.popen.kill()
        self.popen.wait(LONG_S)

    def wait(self, limit_s=LONG_S):
        """Exit status; it must come by itself."""
        try:
            status = self.popen.wait(limit_s)
        except subprocess.TimeoutExpired:
            raise AssertionError(
                f"{self.label} did not end within {limit_s} s\n"
                + self.tail()) from None
        assert status != SANITIZER_STATUS, "sanitizer\n" + self.tail()
        return status

    def tail(self):
        return (f"--- {self.label}: standard output\n{self.stdout[-1500:]}\n"
                f"--- {self.label}: standard error\n{self.stderr[-6000:]}")


class Host:
    """A network namespace that stands for one machine; None: where we are."""

    def __init__(self, bed, name):
        self.bed, self.name = bed, name
        self.prefix = ["ip", "netns", "exec", name] if name else []
        if name:
            run(["ip", "netns", "add", name])
            self.run("ip", "link", "set", "lo", "up")

    def run(self, *argv):
        """Run to its end; its standard output."""
        return run(self.prefix + list(argv))

    def start(self, argv, label, **options):
        process = Process(self.prefix + list(argv), self.bed.folder, label,
                          **options)
        self.bed.processes.append(process)
        return process

    @contextlib.contextmanager
    def inside(self):
        """Sockets made within the `with` belong to this host."""
        libc = ctypes.CDLL(None, use_errno=True)
        with open("/proc/self/ns/net") as back, \
                open(f"/run/netns/{self.name}") as there:
            assert libc.setns(there.fileno(), 0) == 0, ctypes.get_errno()
            try:
                yield
            finally:
                assert libc.setns(back.fileno(), 0) == 0, ctypes.get_errno()

    def counter_bytes(self, interface, way):
        """Kernel's count of bytes; way: "rx" or "tx"."""
        text = self.run("ip", "-json", "-stats", "link", "show", interface)
        return json.loads(text)[0]["stats64"][way]["bytes"]


def run(argv):
    """Run a tool that must succeed; its standard output."""
    done = subprocess.run([str(word) for word in argv], text=True,
                          stdin=subprocess.DEVNULL, capture_output=True)
    assert done.returncode == 0, f"{argv}: {done.stdout}{done.stderr}"
    return done.stdout


class Agent:
    """A plafond-agent on a host, with a policy and a state folder."""

    def __init__(self, bed, host, name):
        self.bed, self.host, self.name = bed, host, name
        self.state = bed.folder / f"agent-{name}"
        self.policy_path = bed.folder / f"agent-{name}.yaml"
        self.process = None
        self.extra = []

    @property
    def identity(self):
        return identity_of([AGENT, "--identity", "--state", self.state])

    def start(self, policy=None, wait=True, **more):
        """Start with this policy; returns when it listens."""
        policy = dict(policy or {}, name=self.name, **more)
        write_yaml(self.policy_path, policy)
        self.process = self.host.start(
            [AGENT, "--policy", self.policy_path, "--state", self.state]
            + self.extra, f"agent-{self.name}")
        if wait:
            wait_for(lambda: " listening " in self.process.stderr
                     or not self.process.running(), "the agent to listen")
            assert self.process.running(), self.process.tail()
        return self

    def listening(self):
        """The words of its `listening` line, as a dictionary."""
        line = re.search(r"^.* listening (.*)$", self.process.stderr, re.M)
        return dict(word.split("=", 1) for word in line.group(1).split())

    def lives(self):
        assert self.process.running(), self.process.tail()

    def stop(self):
        """SIGTERM must end it in order."""
        self.process.signal(signal.SIGTERM)
        status = self.process.wait()
        assert status == 0, f"agent ended with {status}\n" \
            + self.process.tail()


def identity_of(argv):
    text = subprocess.run([str(word) for word in argv], text=True, check=True,
                          stdout=subprocess.PIPE, env=environment()).stdout
    found = re.search(r"sha256:[0-9a-f]{64}", text)
    assert found, f"no identity in '{text}'"
    return found.group(0)


class Bed:
    """Two hosts, a and b, with a veth pair between them and folders for the
    programs.  The declaration, the policies and the agents are made from it.
    """

    def __init__(self, folder):
        self.folder = folder
        self.processes = []
        self.here = Host(self, None)
        self.a = self.b = None
        self.state = folder / "controller"
        self.agents = {}

    # The circuit

    def link(self, mtu=1500):
        """Make hosts a and b and the veth `wire` between them."""
        self.a, self.b = Host(self, "a"), Host(self, "b")
        run(["ip", "link", "add", "wire", "netns", "a", "mtu", mtu,
             "type", "veth", "peer", "name", "wire", "netns", "b"])
        for host, four, six in ((self.a, A4, A6), (self.b, B4, B6)):
            host.run("ip", "link", "set", "wire", "mtu", str(mtu), "up")
            host.run("ip", "address", "add", f"{four}/24", "dev", "wire")
            host.run("ip", "address", "add", f"{six}/64", "dev", "wire",
                     "nodad")
        return self

    def offloads_off(self):
        """Packets on the veth are what a wire would carry."""
        for host in (self.a, self.b):
            host.run("ethtool", "-K", "wire", "tso", "off", "gso", "off",
                     "gro", "off", "tx", "off")

    def shape(self, rate_bps, queue_s=0.05, burst_bytes=BURST_BYTES):
        """tbf at both ends.  It counts a packet with its 14 bytes of Ethernet
        header and without FCS.  The queue is long enough for cubic to keep it
        busy.  Where the machine wakes tbf later than its burst lasts, tbf
        stays below its rate."""
        limit_bytes = max(int(rate_bps / 8 * queue_s), 10 * 1514)
        for host in (self.a, self.b):
            host.run(
                "tc", "qdisc", "replace", "dev", "wire", "root", "tbf",
                "rate", f"{rate_bps}bit", "burst", f"{burst_bytes}b",
                "limit", f"{limit_bytes}b")

    # The programs

    @property
    def identity(self):
        """The controller's."""
        return identity_of([CONTROLLER, "identity", "--state", self.state])

    def policy(self, address):
        """Of an agent that lets this controller measure to our prefixes."""
        return {
            "listen": f"{bracket(address)}:{CONTROL_PORT}",
            "data-port": DATA_PORT,
            "controllers": [self.identity],
            "peers": ["198.18.0.0/15", "2001:2::/48"],
        }

    def agent(self, end, name=None):
        """The agent object of an end, not started."""
        if end not in self.agents:
            host = getattr(self, end) or self.here
            self.agents[end] = Agent(self, host, name or
                                     {"a": "quay", "b": "mast"}[end])
        return self.agents[end]

    def start_agents(self, six=False):
        """Both agents, each listening on its address of the link."""
        for end, four, address6 in (("a", A4, A6), ("b", B4, B6)):
            self.agent(end).start(self.policy(address6 if six else four))
        return self

    def declaration(self, six=False, **changes):
        """Declaration of the link: one service of 20 Mbit/s counted as tbf
        counts, judged leniently, short trials.  A change replaces a top-level
        field; plan and ends are merged; None removes."""
        address = (A6, B6) if six else (A4, B4)
        declared = {
            "circuit": "LINK-01",
            "ends": {
                end: {"name": self.agent(end).name,
                      "control": f"{bracket(address[i])}:{CONTROL_PORT}",
                      "data": address[i], "interface": "wire",
                      "identity": self.agent(end).identity}
                for i, end in enumerate("ab")},
            "medium": {"kind": "ethernet", "line-rate": "1 Gbit/s"},
            "layers": ["ethernet", "ipv6" if six else "ipv4", "tcp"],
            "mtu": "1500 B",
            "service": service(20),
            "criteria": {"throughput": "80 %"},
            "plan": {"trials": 1, "duration": "1 s", "settle": "1 s",
                     "settle-extends": False, "row-spacing": "100 ms",
                     "streams": 1, "directions": ["a-to-b"], "opens": "a"},
        }
        for key, value in changes.items():
            key = key.replace("_", "-")
            if key == "plan":
                declared[key].update(value)
            elif key == "ends":
                for end, members in value.items():
                    declared[key][end].update(members)
                    for name in [name for name, member in members.items()
                                 if member is None]:
                        del declared[key][end][name]
            elif value is None:
                del declared[key]
            else:
                declared[key] = value
        path = self.folder / "circuit.yaml"
        write_yaml(path, declared)
        return path

    def controller(self, *argv, host=None, **options):
        """Start `plafond` on host a, or where there is none, here."""
        words = [CONTROLLER, argv[0], "--state", self.state] + list(argv[1:])
        if argv[0] in ("ceiling", "media", "layers", "draft"):
            words = [CONTROLLER] + list(argv)
        return (host or self.a or self.here).start(
            words, f"plafond-{argv[0]}", **options)

    def accept(self, path, *options, status=None, limit_s=LONG_S, host=None):
        """Run `plafond accept` to its end.  Its record, held to the schema
        and to the exit status; `status` is what is expected."""
        process = self.controller("accept", "--format", "json", *options,
                                  path, host=host)
        found = process.wait(limit_s)
        assert found in (0, 1, 2, 3), \
            f"accept ended with {found}\n" + process.tail()
        record = json.loads(process.stdout)
        check_record(record)
        outcome = record["verdict"]["outcome"]
        assert OUTCOME_STATUS[outcome] == found, \
            f"verdict {outcome}, status {found}"
        if status is not None:
            assert found == status, \
                f"status {found}, expected {status}\n" \
                + json.dumps(record["verdict"], indent=1) + process.tail()
        return record

    def refused(self, *argv, status, says=(), limit_s=LONG_S):
        """Run `plafond` to an error: the status and words of its message."""
        process = self.controller(*argv)
        found = process.wait(limit_s)
        assert found == status, \
            f"status {found}, expected {status}\n" + process.tail()
        message = process.stderr
        for word in says:
            assert re.search(word, message), f"no '{word}' in: {message}"
        return message

    def mid_trial(self, process, host=None, interface="wire"):
        """Return when the load of a trial runs: the counter of the sender's
        interface has grown by 200 kB, more than any control traffic."""
        host = host or self.a
        before = host.counter_bytes(interface, "tx")
        wait_for(lambda: not process.running() or
                 host.counter_bytes(interface, "tx") - before > 200_000,
                 "load on the link")
        assert process.running(), process.tail()

    def kept_records(self):
        """Records in the controller's state folder, the oldest first."""
        paths = sorted((self.state / "records").glob("*.json"))
        return [json.loads(path.read_text()) for path in paths]

    def close(self):
        """Agents still running must stop in order, then nothing is left."""
        try:
            for agent in self.agents.values():
                if agent.process and agent.process.running():
                    agent.stop()
        finally:
            for process in self.processes:
                if process.running():
                    process.kill()
            for process in self.processes:
                text = process.stderr
                assert "AddressSanitizer" not in text and \
                    "LeakSanitizer" not in text and \
                    "runtime error:" not in text, process.tail()


@contextlib.contextmanager
def bed():
    """A Bed in a temporary folder that goes away with everything in it."""
    folder = pathlib.Path(tempfile.mkdtemp(prefix="plafond-net-"))
    made = Bed(folder)
    try:
        try:
            yield made
        except BaseException:
            for process in made.processes:
                print(process.tail())
            raise
        made.close()
    finally:
        for process in made.processes:
            if process.running():
                process.kill()
        for host in (made.a, made.b):
            if host:
                run(["ip", "netns", "delete", host.name])
        shutil.rmtree(folder, ignore_errors=True)


@contextlib.contextmanager
def shaped_bed(rate_bps=20_000_000, six=False, agents=True, **shape):
    """The usual bed: both directions shaped, both agents listening."""
    with bed() as made:
        made.link()
        made.shape(rate_bps, **shape)
        if agents:
            made.start_agents(six)
        yield made


def check_record(record):
    """Hold a record to the project's JSON Schema."""
    import jsonschema
    schema = json.loads(SCHEMA.read_text())
    jsonschema.Draft202012Validator.check_schema(schema)
    jsonschema.Draft202012Validator(
        schema, format_checker=jsonschema.FormatChecker()).validate(record)


def service(mbit_s, burst_bytes=BURST_BYTES):
    """What tbf enforces: its burst is allowed for, lest a rate just above
    the committed one look like a wrong declaration."""
    return {"committed": f"{mbit_s} Mbit/s", "burst": f"{burst_bytes} B",
            "counted-at": "frame-without-fcs"}


def bracket(address):
    return f"[{address}]" if ":" in address else address


def yaml_text(value):
    """YAML flow text of a nested value; scalars stay plain where they can."""
    if isinstance(value, dict):
        return "{ " + ", ".join(f"{key}: {yaml_text(member)}"
                                for key, member in value.items()) + " }"
    if isinstance(value, (list, tuple)):
        return "[ " + ", ".join(yaml_text(member) for member in value) + " ]"
    if isinstance(value, bool):
        return "yes" if value else "no"
    text = str(value)
    plain_enough = re.fullmatch(r"[A-Za-z0-9_./%+-][A-Za-z0-9_./% +-]*", text)
    return text if plain_enough else '"' + text.replace('"', '\\"') + '"'


def write_yaml(path, mapping):
    path.write_text("".join(f"{key}: {yaml_text(value)}\n"
                            for key, value in mapping.items()))
