# SPDX-License-Identifier: GPL-3.0-or-later
"""`plafond draft` against what `ip` and `ethtool` say of real interfaces."""
import json
import re
import subprocess

import harness

NO_SUCH_INTERFACE = 66


def make(host, *words):
    """Make a link; a kind that this kernel cannot make skips the test."""
    done = subprocess.run(host.prefix + ["ip", "link", "add"] + list(words),
                          text=True, capture_output=True)
    if "Unknown device type" in done.stderr or \
            "Operation not supported" in done.stderr:
        raise harness.Skip(f"this kernel makes no '{' '.join(words)}'")
    assert done.returncode == 0, done.stderr


def told(host, name):
    """What iproute2 says of a link."""
    return json.loads(host.run("ip", "-json", "-details", "link", "show",
                               "dev", name))[0]


def ethtool_mbit_s(host, name):
    """The rate that ethtool names, or None."""
    found = re.search(r"Speed: (\d+)M", host.run("ethtool", name))
    return int(found.group(1)) if found else None


def draft(bed, host, name, *options):
    process = bed.controller("draft", *options, name, host=host)
    assert process.wait() == 0, process.tail()
    assert process.stderr == "", process.tail()
    return process.stdout


def field(text, name):
    """Value of a field that is in effect, without its comment; or None."""
    found = re.search(rf"^ *{name}: (.*?)(?:  #.*)?$", text, re.M)
    return found.group(1) if found else None


def words(text):
    """The text with its comments' lines joined."""
    return re.sub(r"\s+(# +)?", " ", text)


def ceiling(bed, text, *overrides):
    """The JSON of `plafond ceiling`, with --set for each override."""
    path = bed.folder / "draft.yaml"
    path.write_text(text)
    sets = [word for override in overrides for word in ("--set", override)]
    process = bed.controller("ceiling", "--format", "json", *sets, path)
    assert process.wait() == 0, process.tail()
    return json.loads(process.stdout)


def payload_bps(record):
    return record["ceilings"][0]["payload_bps"]


def check_mtu(host, text, name, added_bytes=0):
    assert field(text, "mtu") == \
        f"{told(host, name)['mtu'] + added_bytes} B", text


def test_loopback_is_a_reference():
    with harness.bed() as bed:
        text = draft(bed, bed.here, "lo")
        assert told(bed.here, "lo")["link_type"] == "loopback"
        assert field(text, "medium") == "{ kind: host }", text
        check_mtu(bed.here, text, "lo")
        ceiling(bed, text)


def test_veth_leaves_its_rate_to_a_person():
    with harness.bed() as bed:
        bed.link(mtu=1387)
        text = draft(bed, bed.a, "wire")
        assert told(bed.a, "wire")["linkinfo"]["info_kind"] == "veth"
        assert "kind veth" in text, text
        check_mtu(bed.a, text, "wire")
        named = ethtool_mbit_s(bed.a, "wire")
        assert named and named % 1000 == 0
        assert field(text, "line-rate") is None, text
        assert f"# line-rate: RATE  # fill in: Linux names {named // 1000} " \
            "Gbit/s for wire, but nothing limits it" in text, text
        assert field(text, "duplex") == "full", text
        # Both versions are configured, which a person must know.
        assert re.search(r"^layers: \[ ethernet, ipv4, tcp \]  # confirm: ",
                         text, re.M), text
        path = bed.folder / "wire.yaml"
        path.write_text(text)
        bed.refused("ceiling", path, status=65, says=["line-rate"])
        record = ceiling(bed, text, "medium.line-rate=1 Gbit/s",
                         "circuit=LINK-01")
        # RFC 7323 and IEEE 802.3: 52 octets in the packet, 38 about it
        assert payload_bps(record) == 10**9 * (1387 - 52) // (1387 + 38)


def test_only_ipv6_is_configured():
    with harness.bed() as bed:
        bed.link()
        bed.a.run("ip", "-4", "address", "flush", "dev", "wire")
        text = draft(bed, bed.a, "wire")
        assert field(text, "layers") == "[ ethernet, ipv6, tcp ]", text
        ceiling(bed, text, "medium.line-rate=1 Gbit/s")


def test_bridge_follows_its_only_port():
    with harness.bed() as bed:
        bed.link()
        make(bed.a, "bridge0", "type", "bridge")
        text = draft(bed, bed.a, "bridge0")
        assert "bridge0: it has no ports" in text, text
        bed.a.run("ip", "link", "set", "wire", "master", "bridge0")
        text = draft(bed, bed.a, "bridge0")
        assert told(bed.a, "wire")["master"] == "bridge0"
        assert "a port of bridge0" in words(text), text
        assert field(text, "kind") == "ethernet", text
        check_mtu(bed.a, text, "bridge0")
        make(bed.a, "other", "type", "veth", "peer", "name", "rehto")
        bed.a.run("ip", "link", "set", "other", "master", "bridge0")
        text = draft(bed, bed.a, "bridge0")
        assert field(text, "kind") is None, text
        assert "# medium: { kind: NAME }  # fill in: bridge0" in text, text
        record = ceiling(bed, text, "medium={ kind: ethernet, "
                         "line-rate: 1 Gbit/s }")
        assert payload_bps(record) == 10**9 * 1448 // 1538


def test_macvlan_lies_on_its_parent():
    with harness.bed() as bed:
        bed.link(mtu=1300)
        make(bed.a, "mac0", "link", "wire", "type", "macvlan")
        text = draft(bed, bed.a, "mac0")
        assert told(bed.a, "mac0")["link"] == "wire"
        assert re.search(r"^#   mac0: .*\n(#     .*\n)*#   wire: ", text,
                         re.M), text
        check_mtu(bed.a, text, "mac0")
        ceiling(bed, text, "medium.line-rate=1 Gbit/s")


def vxlan(version, options, added_bytes):
    """A VXLAN over the veth; its far end known by the route alone unless the
    options name the device."""
    with harness.bed() as bed:
        bed.link(mtu=1600)
        make(bed.a, "vx0", "mtu", "1430", "type", "vxlan", "id", "7",
             "dstport", "4789", "remote",
             harness.B4 if version == 4 else harness.B6, *options)
        bed.a.run("ip", "address", "add", "198.18.7.1/24", "dev", "vx0")
        bed.a.run("ip", "link", "set", "vx0", "up")
        text = draft(bed, bed.a, "vx0")
        info = told(bed.a, "vx0")["linkinfo"]
        assert info["info_kind"] == "vxlan"
        assert ("remote6" in info["info_data"]) == (version == 6)
        assert field(text, "layers") == f"[ ethernet, ipv{version}, udp, " \
            "vxlan, ethernet, ipv4, tcp ]", text
        assert "#   wire: " in text, text
        check_mtu(bed.a, text, "vx0", added_bytes)
        record = ceiling(bed, text, "medium.line-rate=1 Gbit/s")
        # RFC 7348 section 5
        assert payload_bps(record) == \
            10**9 * (1430 - 52) // (1430 + added_bytes + 38)


def test_vxlan_over_ipv4_lies_on_the_route():
    vxlan(4, [], 50)


def test_vxlan_over_ipv6_lies_on_its_device():
    vxlan(6, ["dev", "wire"], 70)


def test_vxlan_that_is_set_packet_by_packet_is_left_open():
    with harness.bed() as bed:
        make(bed.here, "vx0", "type", "vxlan", "external", "dstport", "4789")
        text = draft(bed, bed.here, "vx0")
        assert field(text, "layers") is None, text
        assert "packet by packet" in words(text), text


def test_link_whose_parent_is_elsewhere_is_left_open():
    with harness.bed() as bed:
        bed.link()
        make(bed.a, "mac0", "link", "wire", "type", "macvlan")
        bed.a.run("ip", "link", "set", "mac0", "netns", "b")
        text = draft(bed, bed.b, "mac0")
        assert "link_index" in told(bed.b, "mac0")
        assert "another network namespace" in text, text
        assert field(text, "kind") is None, text


def test_tun_and_tap_are_left_open():
    with harness.bed() as bed:
        for mode in ("tun", "tap"):
            bed.here.run("ip", "tuntap", "add", "dev", f"{mode}0", "mode",
                         mode)
            text = draft(bed, bed.here, f"{mode}0")
            assert told(bed.here, f"{mode}0")["linkinfo"]["info_data"][
                "type"] == mode
            assert field(text, "kind") is None, text
            assert field(text, "line-rate") is None, text
            assert (field(text, "layers") is None) == (mode == "tun"), text
            check_mtu(bed.here, text, f"{mode}0")


def test_dummy_leads_nowhere():
    with harness.bed() as bed:
        make(bed.here, "dummy7", "type", "dummy")
        assert "dummy7: it leads nowhere" in draft(bed, bed.here, "dummy7")


def test_tags_are_layers():
    with harness.bed() as bed:
        bed.link()
        make(bed.a, "outer", "link", "wire", "type", "vlan", "protocol",
             "802.1ad", "id", "20")
        make(bed.a, "inner", "link", "outer", "type", "vlan", "id", "30")
        text = draft(bed, bed.a, "inner")
        assert field(text, "layers") == "[ ethernet, vlan, vlan, ipv4, tcp ]"
        for name, tag in (("inner", "VLAN 30 (802.1Q)"),
                            ("outer", "VLAN 20 (802.1ad)")):
            info = told(bed.a, name)["linkinfo"]["info_data"]
            assert f"VLAN {info['id']} ({info['protocol']})" == tag
            assert tag in text, text
        check_mtu(bed.a, text, "inner")


def tunnel(kind, layers, options=()):
    with harness.bed() as bed:
        bed.link()
        six = kind.startswith("ip6")
        make(bed.a, "tunnel0", "type", kind, "local",
             harness.A6 if six else harness.A4, "remote",
             harness.B6 if six else harness.B4, *options)
        text = draft(bed, bed.a, "tunnel0")
        assert field(text, "layers") == layers, text
        # The kernel leaves room in its MTU for exactly what it adds.
        assert field(text, "mtu") == f"{told(bed.a, 'wire')['mtu']} B", text
        ceiling(bed, text, "medium.line-rate=1 Gbit/s")


def test_gre_with_a_key():
    tunnel("gre", "[ ethernet, ipv4, { gre: { checksum: no, key: yes, "
           "sequence: no } }, ipv4, tcp ]", ["key", "5"])


def test_ip_in_ip():
    tunnel("ipip", "[ ethernet, ipv4, ipv4, tcp ]")


def test_ipv6_in_ipv4():
    tunnel("sit", "[ ethernet, ipv4, ipv6, tcp ]")


def test_ipv4_in_ipv6_with_an_encapsulation_limit():
    tunnel("ip6tnl", "[ ethernet, { ipv6: { extension-bytes: 8 B } }, ipv4, "
           "tcp ]", ["mode", "ipip6"])


def test_macsec():
    with harness.bed() as bed:
        bed.link()
        make(bed.a, "macsec0", "link", "wire", "type", "macsec")
        text = draft(bed, bed.a, "macsec0")
        info = told(bed.a, "macsec0")["linkinfo"]["info_data"]
        assert field(text, "layers") == "[ ethernet, { macsec: { sci: " + \
            ("yes" if info["send_sci"] else "no") + \
            f", icv-bytes: {info['icvlen']} B }} }}, ipv4, tcp ]", text
        check_mtu(bed.a, text, "macsec0")


def test_odd_name_stays_in_its_comment():
    with harness.bed() as bed:
        # U+2028 ends a line in YAML 1.1.
        for name in ('"}#\\', "\u2028mtu", "\x1b[1m", "caf\u00e9"):
            make(bed.here, name, "type", "veth", "peer", "name", "peer")
            text = draft(bed, bed.here, name)
            assert re.fullmatch(r"[\n -~]*", text), text
            assert field(text, "mtu") == "1500 B", text
            ceiling(bed, text, "medium.line-rate=1 Gbit/s")
            bed.here.run("ip", "link", "delete", name)


def test_alternative_name_is_a_name():
    with harness.bed() as bed:
        bed.link()
        bed.a.run("ip", "link", "property", "add", "dev", "wire", "altname",
                  "the-line-to-the-harbour")
        assert draft(bed, bed.a, "the-line-to-the-harbour") == \
            draft(bed, bed.a, "wire")


def test_absent_interface_names_the_nearest():
    with harness.bed() as bed:
        bed.link()
        process = bed.controller("draft", "wirr")
        assert process.wait() == NO_SUCH_INTERFACE, process.tail()
        assert process.stdout == ""
        assert "no interface 'wirr', did you mean 'wire'?" in process.stderr
        assert "lo" in process.stderr, process.stderr
        for name in ("", "x" * 300, "\x1b[2J", "../lo"):
            process = bed.controller("draft", name)
            assert process.wait() == NO_SUCH_INTERFACE, process.tail()
            assert "\x1b" not in process.stderr


def test_output_goes_to_the_file_alone():
    with harness.bed() as bed:
        bed.link()
        path = bed.folder / "draft.yaml"
        before = told(bed.a, "wire")
        assert draft(bed, bed.a, "wire", "-o", path) == ""
        assert path.read_text() == draft(bed, bed.a, "wire")
        assert told(bed.a, "wire") == before
        path.unlink()
        bed.refused("draft", "-o", path, "absent0", status=NO_SUCH_INTERFACE)
        assert not path.exists()
        bed.refused("draft", "-o", bed.folder / "none" / "x", "lo", status=73)


def test_no_privilege_is_needed():
    with harness.bed() as bed:
        bed.link()
        process = bed.a.start(
            ["setpriv", "--reuid=65534", "--regid=65534", "--clear-groups",
             "--bounding-set=-all", harness.CONTROLLER, "draft", "wire"],
            "draft-as-nobody")
        assert process.wait() == 0, process.tail()
        assert process.stdout == draft(bed, bed.a, "wire")
