# SPDX-License-Identifier: GPL-3.0-or-later
"""tests/install under apt, dpkg and sudo of our own: what it does to a machine
and what it says where it cannot help."""
import os
import pathlib
import signal
import stat
import subprocess

import harness

INSTALL = harness.SOURCE / "tests/install"
POLICY = pathlib.Path("/usr/sbin/policy-rc.d")
TOOLS = ("awk", "chmod", "dirname", "env", "flock", "grep", "readlink", "rm",
         "sh", "sleep", "sort", "cat")
# Says that nothing is installed; apt-get shows what it finds of the policy.
DPKG_QUERY = "exit 1"
APT_GET = f"""
echo "apt-get $*" >>"$LOG"
if [ -x {POLICY} ]; then
	{POLICY} || echo "policy $?" >>"$LOG"
fi
"""


class Machine:
    """A PATH with nothing but a few tools and our own programs, and an empty
    /usr/sbin in this test's own mount namespace."""

    def __init__(self, bed):
        harness.run(["mount", "-t", "tmpfs", "tmpfs", "/usr/sbin"])
        self.bin, self.log = bed.folder / "bin", bed.folder / "log"
        self.bin.mkdir()
        self.log.touch()
        for tool in TOOLS:
            (self.bin / tool).symlink_to(
                os.path.realpath(f"/usr/bin/{tool}"))

    def program(self, name, text):
        path = self.bin / name
        path.write_text(f"#!/bin/sh\n{text}\n")
        path.chmod(0o755)

    def start(self, *argv):
        return subprocess.Popen(
            [INSTALL, *argv], text=True, stdout=subprocess.PIPE,
            stderr=subprocess.PIPE,
            env={"PATH": str(self.bin), "LOG": str(self.log)})

    def run(self, *argv):
        process = self.start(*argv)
        out, err = process.communicate(timeout=harness.LONG_S)
        return process.returncode, out, err

    @property
    def calls(self):
        return self.log.read_text()


def with_apt(machine, uid=0, apt_get=APT_GET):
    machine.program("dpkg-query", DPKG_QUERY)
    machine.program("apt-get", apt_get)
    machine.program("id", f"echo {uid}")


def signal_root_part(number):
    """To the process that placed the policy; only ours are in this /proc."""
    for path in pathlib.Path("/proc").glob("[0-9]*/cmdline"):
        if b"--as-root" in path.read_bytes():
            os.kill(int(path.parent.name), number)


def test_no_install_only_prints():
    with harness.bed() as bed:
        machine = Machine(bed)
        with_apt(machine)
        status, out, _ = machine.run("--no-install", "build", "test")
        assert status == 0
        assert "libevent-dev" in out.split() and "tshark" in out.split()
        assert "debootstrap" not in out
        assert machine.calls == ""


def test_services_are_denied_for_the_time_of_the_installation():
    with harness.bed() as bed:
        machine = Machine(bed)
        with_apt(machine)
        status, _, err = machine.run("build")
        assert status == 0, err
        install = [line for line in machine.calls.splitlines()
                   if " install " in line]
        assert len(install) == 1 and "libevent-dev" in install[0]
        assert "--no-install-recommends" in install[0]
        assert "policy 101" in machine.calls
        assert not POLICY.exists()


def test_policy_goes_away_when_the_installation_is_terminated():
    with harness.bed() as bed:
        machine = Machine(bed)
        with_apt(machine, apt_get=APT_GET + "sleep 2")
        process = machine.start("build")
        harness.wait_for(POLICY.exists, "the policy")
        signal_root_part(signal.SIGTERM)
        process.communicate(timeout=harness.LONG_S)
        assert process.returncode != 0
        assert not POLICY.exists()


def test_policy_of_a_run_that_was_killed_is_replaced():
    with harness.bed() as bed:
        machine = Machine(bed)
        with_apt(machine, apt_get=APT_GET + "sleep 1")
        process = machine.start("build")
        harness.wait_for(POLICY.exists, "the policy")
        signal_root_part(signal.SIGKILL)
        process.communicate(timeout=harness.LONG_S)
        assert POLICY.exists(), "nobody could remove it"
        status, _, err = machine.run("build")
        assert status == 0, err
        assert not POLICY.exists()


def test_policy_of_the_machine_stays():
    with harness.bed() as bed:
        machine = Machine(bed)
        with_apt(machine)
        POLICY.write_text("#!/bin/sh\nexit 104\n")
        POLICY.chmod(0o755)
        before = POLICY.read_text()
        assert machine.run("build")[0] == 0
        assert "policy 104" in machine.calls
        assert POLICY.read_text() == before
        assert POLICY.stat().st_mode & stat.S_IXUSR


def test_sudo_is_used_where_not_root():
    with harness.bed() as bed:
        machine = Machine(bed)
        with_apt(machine, uid=1000)
        machine.program("sudo", 'echo "sudo $*" >>"$LOG"\nshift\nexec "$@"')
        status, _, err = machine.run("build")
        assert status == 0, err
        assert "sudo -- " in machine.calls and "policy 101" in machine.calls


def stops_with_the_list(machine, says):
    status, out, err = machine.run("build")
    assert status == 1, (status, err)
    assert "gcc" in out.split() and "r-mathlib" in out.split(), out
    assert says in err, err


def test_neither_root_nor_sudo_stops_with_the_list():
    with harness.bed() as bed:
        machine = Machine(bed)
        with_apt(machine, uid=1000)
        stops_with_the_list(machine, "neither root nor sudo")


def test_no_apt_stops_with_the_list():
    with harness.bed() as bed:
        stops_with_the_list(Machine(bed), "no apt")


def test_apt_that_fails_stops_with_the_list():
    with harness.bed() as bed:
        machine = Machine(bed)
        with_apt(machine, apt_get="exit 100")
        stops_with_the_list(machine, "apt failed")
        assert not POLICY.exists()


def test_nothing_missing_calls_nothing():
    with harness.bed() as bed:
        machine = Machine(bed)
        with_apt(machine)
        machine.program("dpkg-query", "printf 'install ok installed'")
        status, out, err = machine.run("build", "test")
        assert (status, out) == (0, ""), err
        assert machine.calls == ""
