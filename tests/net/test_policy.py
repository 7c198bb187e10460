# SPDX-License-Identifier: GPL-3.0-or-later
"""What an agent's policy allows is what it does."""
import harness

UNDECIDED, REFUSED, BUSY = 2, 77, 75


def policy_bed(bed, **changes):
    """Start both agents; changes are for b's policy."""
    bed.agent("a").start(bed.policy(harness.A4))
    policy = bed.policy(harness.B4)
    policy.update({key.replace("_", "-"): value
                   for key, value in changes.items()})
    bed.agent("b").start(policy)


def test_longer_trial_than_allowed_is_refused():
    with harness.shaped_bed(agents=False) as bed:
        policy_bed(bed, longest_trial="2 s")
        path = bed.declaration(plan={"duration": "5 s"})
        bed.refused("accept", path, status=REFUSED, says=["mast"])


def test_peer_outside_the_prefixes_is_refused():
    with harness.shaped_bed(agents=False) as bed:
        policy_bed(bed, peers=["198.18.99.0/24"])
        bed.refused("accept", bed.declaration(), status=REFUSED,
                    says=["mast"])


def test_highest_rate_is_kept():
    with harness.shaped_bed(agents=False) as bed:
        policy_bed(bed, highest_rate="4 Mbit/s")
        path = bed.declaration(plan={"directions": ["b-to-a"]})
        process = bed.controller("accept", "--format", "json", path)
        status = process.wait()
        # Held back to 4 Mbit/s, or refused: never more.  Pacing counts whole
        # packets, so the payload is below it; 10 % are for the first burst.
        if status != REFUSED:
            record = harness.json.loads(process.stdout)
            assert record["trials"][0]["payload_bps"] < 4_400_000
            assert record["verdict"]["outcome"] == "void", \
                "a limit of ours below the ceiling cannot judge a circuit"


def test_second_controller_is_told_that_the_agent_is_busy():
    with harness.shaped_bed() as bed:
        path = bed.declaration(plan={"duration": "8 s"})
        first = bed.controller("accept", path)
        bed.mid_trial(first)
        bed.refused("accept", path, status=BUSY,
                    says=["quay|mast", "running"])
        assert first.wait() == UNDECIDED, first.tail()


def bad_policy(text, says):
    with harness.bed() as bed:
        path = bed.folder / "agent.yaml"
        path.write_text(text)
        process = bed.here.start([harness.AGENT, "--policy", path, "--state",
                                  bed.folder / "state"], "agent")
        assert process.wait() == 78, process.tail()
        for word in says:
            assert word in process.stderr, process.tail()


@harness.plain
def test_unknown_field_of_a_policy_is_named():
    bad_policy("name: quay\nlisten: \"198.18.0.1:61741\"\npears: []\n",
               ["agent.yaml:3:", "pears", "peers"])


@harness.plain
def test_bad_unit_in_a_policy_is_named():
    bad_policy("name: quay\nlongest-trial: 60\n",
               ["agent.yaml:2:", "longest-trial", "60"])
