# SPDX-License-Identifier: GPL-3.0-or-later
"""Who dials and who commands are separate: an agent that calls the controller,
and one that calls the other agent, which relays."""
import harness

UNDECIDED = 2		# one trial alone decides nothing
CALLS_PORT = 61743	# where the controller on host a takes calls


def calling_policy(bed, address, identity):
    """Host b's agent: nobody can dial it for control, so it calls."""
    policy = bed.policy(harness.B4)
    policy["calls"] = [{"address": address, "identity": identity}]
    return policy


def test_agent_calls_the_controller():
    with harness.shaped_bed(agents=False) as bed:
        bed.agent("a").start(bed.policy(harness.A4))
        calls = f"{harness.A4}:{CALLS_PORT}"
        bed.agent("b").start(calling_policy(bed, calls, bed.identity))
        path = bed.declaration(ends={"b": {"control": "called"}})
        record = bed.accept(path, "--listen", calls, status=UNDECIDED)
        assert record["trials"][0]["payload_bps"] > 0
        # It calls again: the next task finds it too.
        bed.accept(path, "--listen", calls, status=UNDECIDED)


def test_caller_that_never_comes_is_unreachable():
    with harness.shaped_bed(agents=False) as bed:
        bed.agent("a").start(bed.policy(harness.A4))
        path = bed.declaration(ends={"b": {"control": "called"}})
        bed.refused("accept", "--listen", f"{harness.A4}:{CALLS_PORT}", path,
                    status=69, says=["mast"])


def test_caller_with_another_identity_is_not_taken():
    with harness.shaped_bed(agents=False) as bed:
        bed.agent("a").start(bed.policy(harness.A4))
        calls = f"{harness.A4}:{CALLS_PORT}"
        bed.agent("b").start(calling_policy(bed, calls, bed.identity))
        path = bed.declaration(ends={"b": {
            "control": "called", "identity": "sha256:" + "0" * 64}})
        process = bed.controller("accept", "--listen", calls, path)
        assert process.wait() in (69, 77), process.tail()


def relayed_bed(bed):
    quay, mast = bed.agent("a"), bed.agent("b")
    quay.start(bed.policy(harness.A4),
               callers=[{"name": "mast", "identity": mast.identity}])
    mast.start(calling_policy(bed, f"{harness.A4}:{harness.CONTROL_PORT}",
                              quay.identity))
    return bed.declaration(ends={"b": {"control": "relayed"}})


def test_other_agent_relays():
    with harness.shaped_bed(agents=False) as bed:
        path = relayed_bed(bed)
        harness.wait_for(lambda: bed.controller("ready", path).wait() == 0,
                         "the relayed agent to be ready")
        record = bed.accept(path, status=UNDECIDED)
        assert record["trials"][0]["payload_bps"] > 0
        bed.accept(path, status=UNDECIDED)


def test_relay_cannot_stand_in_for_the_far_agent():
    with harness.shaped_bed(agents=False) as bed:
        relayed_bed(bed)
        # A declaration that expects another key behind the relay.
        path = bed.declaration(ends={"b": {
            "control": "relayed", "identity": "sha256:" + "0" * 64}})
        process = bed.controller("ready", path)
        assert process.wait() in (69, 77), process.tail()


def test_stranger_may_not_call():
    with harness.shaped_bed(agents=False) as bed:
        quay = bed.agent("a")
        quay.start(bed.policy(harness.A4), callers=[
            {"name": "mast", "identity": "sha256:" + "0" * 64}])
        bed.agent("b").start(calling_policy(
            bed, f"{harness.A4}:{harness.CONTROL_PORT}", quay.identity))
        path = bed.declaration(ends={"b": {"control": "relayed"}})
        process = bed.controller("ready", path)
        assert process.wait() in (69, 77), process.tail()
        quay.lives()
