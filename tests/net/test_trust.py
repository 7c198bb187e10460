# SPDX-License-Identifier: GPL-3.0-or-later
"""Pins and authorities: who is let in, and what is said to the others."""
import certificates
import harness

UNDECIDED = 2		# one trial alone decides nothing
REFUSED = 77


def signed_agents(bed, dates=certificates.VALID):
    """Both agents with certificates from an authority; returns it."""
    authority = certificates.Authority(bed.folder / "authority")
    for end, name in (("a", "quay.example"), ("b", "mast.example")):
        authority.identity(bed.agent(end).state / "identity.pem", name, dates)
    bed.start_agents()
    return authority


def by_authority(bed, authority):
    """A declaration that trusts the authority, not the keys."""
    return bed.declaration(ends={
        end: {"identity": {"authority": authority.certificate, "name": name}}
        for end, name in (("a", "quay.example"), ("b", "mast.example"))})


def test_wrong_pin_is_refused():
    with harness.shaped_bed() as bed:
        wrong = "sha256:" + "0" * 64
        path = bed.declaration(ends={"b": {"identity": wrong}})
        bed.refused("accept", path, status=REFUSED,
                    says=["mast", bed.agent("b").identity])


def test_controller_that_the_policy_does_not_name_is_refused():
    with harness.shaped_bed(agents=False) as bed:
        for end, address in (("a", harness.A4), ("b", harness.B4)):
            policy = bed.policy(address)
            policy["controllers"] = ["sha256:" + "0" * 64]
            bed.agent(end).start(policy)
        bed.refused("ready", bed.declaration(), status=REFUSED)


def test_authority_is_trusted():
    with harness.shaped_bed(agents=False) as bed:
        authority = signed_agents(bed)
        bed.accept(by_authority(bed, authority), status=UNDECIDED)


def test_certificate_with_another_name_is_refused():
    with harness.shaped_bed(agents=False) as bed:
        authority = signed_agents(bed)
        path = bed.declaration(ends={"b": {"identity": {
            "authority": authority.certificate, "name": "buoy.example"}}})
        bed.refused("ready", path, status=REFUSED, says=["buoy.example"])


def test_foreign_authority_is_refused():
    with harness.shaped_bed(agents=False) as bed:
        signed_agents(bed)
        foreign = certificates.Authority(bed.folder / "foreign")
        bed.refused("accept", by_authority(bed, foreign), status=REFUSED)


def test_expired_certificate_is_refused_and_the_clock_named():
    with harness.shaped_bed(agents=False) as bed:
        authority = signed_agents(bed, certificates.EXPIRED)
        bed.refused("accept", by_authority(bed, authority), status=REFUSED,
                    says=["clock", "expired"])


def test_expired_certificate_under_a_pin_is_accepted():
    with harness.shaped_bed(agents=False) as bed:
        signed_agents(bed, certificates.EXPIRED)
        bed.accept(bed.declaration(), status=UNDECIDED)


def test_identity_stays_the_same_and_private():
    with harness.bed() as bed:
        first = bed.identity
        assert bed.identity == first
        mode = (bed.state / "identity.pem").stat().st_mode & 0o777
        assert mode == 0o600, oct(mode)
        agent = bed.agent("a")
        assert agent.identity == agent.identity != first


test_identity_stays_the_same_and_private.plain = True
