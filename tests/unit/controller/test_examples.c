/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

/* The ladder of every example declaration. */
#include <dirent.h>

#include "declaration_text.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))
#define FOLDER SOURCE_FOLDER "/controller/examples"

/* Exact: worked out with rational arithmetic from the sizes in the source,
 * every level rounded down; 0: the medium has no frames. */
static const struct {
	const char *file;
	enum direction direction;
	uint64_t line_rate_bps;
	uint64_t bps[5];	/* line, frame, packet, segment, payload */
	const char *source;
} exact_vectors[] = {
	{ "adsl-pppoa", DIRECTION_A_TO_B, 24000000,
	  { 24000000, 0, 21226415, 20943396, 20490566 },
	  "RFC 2364: 32 cells" },
	{ "adsl-pppoa", DIRECTION_B_TO_A, 1000000,
	  { 1000000, 0, 884433, 872641, 853773 },
	  "RFC 2364: 32 cells" },
	{ "gfast-building", DIRECTION_A_TO_B, 600000000,
	  { 600000000, 577432285, 570585262, 562977458, 550804973 },
	  "2 % declared" },
	{ "gfast-building", DIRECTION_B_TO_A, 150000000,
	  { 150000000, 144358071, 142646315, 140744364, 137701243 },
	  "2 % declared" },
	{ "gigabit-access", DIRECTION_A_TO_B, 1000000000,
	  { 1000000000, 986996098, 975292587, 962288686, 941482444 },
	  "RFC 5180 A.1: 1448/1538" },
	{ "gre-nat", DIRECTION_A_TO_B, 100000000,
	  { 100000000, 98692810, 97516339, 91111111, 89019607 },
	  "RFC 4303, 2890" },
	{ "ipv6-access", DIRECTION_A_TO_B, 10000000000,
	  { 10000000000, 9869960988, 9752925877, 9492847854, 9272334790 },
	  "RFC 8200, RFC 8446 s5.2" },
	{ "l2tp-broadband", DIRECTION_A_TO_B, 1000000000,
	  { 1000000000, 987029831, 972762645, 933852140, 913099870 },
	  "RFC 2661: 8, PPP with address and control 4" },
	{ "leased-ds3", DIRECTION_A_TO_B, 44736000,
	  { 44736000, 43479082, 43305858, 42728447, 42151036 },
	  "RFC 1662" },
	{ "leased-e1", DIRECTION_A_TO_B, 2048000,
	  { 2048000, 1951212, 1943438, 1917526, 1876066 },
	  "RFC 1662" },
	{ "leased-ip", DIRECTION_A_TO_B, 300000000,
	  { 300000000, 0, 300000000, 296000000, 289600000 },
	  "1448/1500" },
	{ "leased-ip", DIRECTION_B_TO_A, 60000000,
	  { 60000000, 0, 60000000, 59200000, 57920000 },
	  "1448/1500" },
	{ "mpls-core", DIRECTION_A_TO_B, 10000000000,
	  { 10000000000, 9873257287, 9505703422, 9378960709, 9176172370 },
	  "RFC 3032, IEEE 802.1AE: 1448/1578" },
	{ "otn-wave", DIRECTION_A_TO_B, 10709225316,
	  { 10709225316, 9942877082, 9824977354, 9693977656, 9484378139 },
	  "ITU-T G.709, G.7041: 1448/1526" },
	{ "pseudowire", DIRECTION_A_TO_B, 10000000000,
	  { 10000000000, 9872122762, 9590792838, 9462915601, 9258312020 },
	  "RFC 4448, 3032: 1448/1564" },
	{ "qinq-service", DIRECTION_A_TO_B, 1000000000,
	  { 202621231, 200000000, 196592398, 193971166, 189777195 },
	  "RFC 5180 A.1; 200 Mbit/s * 1448/1526" },
	{ "quic-users", DIRECTION_A_TO_B, 1000000000,
	  { 1000000000, 986996098, 975292587, 962288686, 934980494 },
	  "RFC 9000" },
	{ "radio-hop", DIRECTION_A_TO_B, 396000000,
	  { 396000000, 356400000, 352173913, 347478260, 339965217 },
	  "49.5 MBd * 8 bit * 0.9 * 1448/1518" },
	{ "sdh-atm", DIRECTION_A_TO_B, 155520000,
	  { 155520000, 0, 132452830, 130686792, 127861132 },
	  "RFC 2684: 32 cells" },
	{ "shaped-veth", DIRECTION_A_TO_B, 10000000000,
	  { 101585204, 100264200, 99075297, 97754293, 95640686 },
	  "100 Mbit/s * 1448/1514" },
	{ "sonet-packet", DIRECTION_A_TO_B, 155520000,
	  { 155520000, 148500594, 147712793, 145743289, 142592082 },
	  "RFC 1662" },
	{ "two-segments", DIRECTION_A_TO_B, 1000000000,
	  { 628168642, 620000000, 612648221, 604479578, 591409749 },
	  "620 Mbit/s * 1448/1518" },
	{ "two-segments", DIRECTION_B_TO_A, 10000000000,
	  { 628125819, 620000000, 609436435, 601310615, 588309305 },
	  "620 Mbit/s * 1448/1526" },
	{ "vdsl-ipsec", DIRECTION_A_TO_B, 100000000,
	  { 100000000, 98202769, 96520772, 91733548, 89543162 },
	  "RFC 4106, RFC 8446: 1386/1522, 64/65, 16384/16406" },
	{ "vdsl-ipsec", DIRECTION_B_TO_A, 40000000,
	  { 40000000, 39281107, 38608308, 36693419, 35817264 },
	  "RFC 4106, RFC 8446: 1386/1522, 64/65, 16384/16406" },
	{ "vdsl-pppoe", DIRECTION_A_TO_B, 100000000,
	  { 100000000, 98202769, 96520772, 95226928, 93156777 },
	  "IEEE 802.3 s61.3" },
	{ "vdsl-pppoe", DIRECTION_B_TO_A, 40000000,
	  { 40000000, 39281107, 38608308, 38090771, 37262711 },
	  "IEEE 802.3 s61.3" },
	{ "vlan-service", DIRECTION_A_TO_B, 1000000000,
	  { 506570302, 500000000, 492772667, 486202365, 475689881 },
	  "500 Mbit/s * 1448/1522" },
	{ "vlan-service", DIRECTION_B_TO_A, 1000000000,
	  { 50657030, 50000000, 49277266, 48620236, 47568988 },
	  "50 Mbit/s * 1448/1522" },
	{ "vxlan-fabric", DIRECTION_A_TO_B, 25000000000,
	  { 25000000000, 24674902470, 24382314694, 23244473342, 22724317295 },
	  "1398/1538" },
	{ "wireguard", DIRECTION_A_TO_B, 1000000000,
	  { 1000000000, 986824769, 974967061, 922266139, 901185770 },
	  "1368/1518" },
};

/* Where the rates of a family are a model or depend on constants with few
 * digits: the payload rate within so many ppm of the source's figure. */
static const struct {
	const char *file;
	enum direction direction;
	double payload_bps, within_ppm;
	const char *source;
} near_vectors[] = {
	{ "cable-scqam", DIRECTION_A_TO_B, 190777338, 0.1,
	  "200 Mbit/s of frames * 1448/1518" },
	{ "cable-scqam", DIRECTION_B_TO_A, 19077733, 0.1,
	  "20 Mbit/s of frames * 1448/1518" },
	{ "cable-ofdm", DIRECTION_A_TO_B, 1719.6e6 * 1448 / 1535, 60,
	  "1719.6 Mbit/s of a block, by hand; 17 octets of MAC header" },
	{ "cable-ofdm", DIRECTION_B_TO_A, 100e6 * 1448 / 1528, 0.1,
	  "100 Mbit/s declared; 10 octets of MAC header" },
	{ "gpon", DIRECTION_A_TO_B, 953886693, 0.1,
	  "1 Gbit/s of frames * 1448/1518" },
	{ "gpon", DIRECTION_B_TO_A, 476943346, 0.1,
	  "500 Mbit/s of frames * 1448/1518" },
	{ "xgs-pon", DIRECTION_A_TO_B, 8212.874e6, 0.1,
	  "ITU-T G.9807.1: 8666.624 Mbit/s * 1448/1528, by hand" },
	{ "xg-pon", DIRECTION_A_TO_B, 8212.874e6, 0.1,
	  "ITU-T G.987.3: 8666.624 Mbit/s * 1448/1528, by hand" },
	{ "lte-access", DIRECTION_A_TO_B, 150.752e6 * 1448 / 1507, 0.1,
	  "3GPP TS 36.213: 2 * 75376 bit each millisecond" },
	{ "lte-access", DIRECTION_B_TO_A, 51.024e6 * 1448 / 1507, 0.1,
	  "3GPP TS 36.213: 51024 bit each millisecond" },
	{ "nr-access", DIRECTION_A_TO_B, 1736.06e6 * 1448 / 1510, 5,
	  "3GPP TS 38.306 s4.1.2: 2337.00 Mbit/s * 104/140 symbols" },
	{ "nr-access", DIRECTION_B_TO_A, 1250.02e6 * 32 / 140 * 1448 / 1510, 5,
	  "3GPP TS 38.306 s4.1.2: 1250.02 Mbit/s * 32/140 symbols" },
	{ "wlan-office", DIRECTION_A_TO_B, 541.55e6, 10,
	  "IEEE 802.11-2020, 64 MPDU of 1560 octets in 972 us, by hand" },
	{ "telephone-modem", DIRECTION_A_TO_B, 36044.3 * 1448 / 1507 * 62 / 63,
	  30, "Shannon 1949: 3.1 kHz, 35 dB" },
	{ "satellite", DIRECTION_A_TO_B, 40.97e6 * 1448 / 1507 * 62 / 63, 300,
	  "kTB at 290 K is -100.965 dBm; 20 MHz log2(1 + 10^0.4965)" },
};

static struct circuit *
read_example(const char *name)
{
	struct circuit *circuit = NULL;
	struct error err;
	char path[512], why[1024];

	(void)snprintf(path, sizeof(path), FOLDER "/%s.yaml", name);
	if (circuit_read_file(path, NULL, 0, &circuit, &err) == -1)
		fail_msg("%s", error_text(&err, why, sizeof(why)));
	return circuit;
}

static void
ceiling_of_example(const char *name, enum direction direction,
    struct ceiling *out)
{
	const struct load load = { .direction = direction, .declared = true };
	struct circuit *circuit = read_example(name);
	struct error err;
	char why[1024];

	if (ceiling_of_load(circuit, &load, out, &err) == -1)
		fail_msg("%s: %s", name, error_text(&err, why, sizeof(why)));
	circuit_free(circuit);
}

static void
ladders_of_examples_equal_sums_by_hand(void **state)
{
	static const enum layer_level levels[] = { LEVEL_LINE, LEVEL_FRAME,
		LEVEL_PACKET, LEVEL_SEGMENT, LEVEL_PAYLOAD };
	struct ceiling c;
	size_t i, n;

	(void)state;
	for (i = 0; i < COUNT(exact_vectors); i++) {
		ceiling_of_example(exact_vectors[i].file,
		    exact_vectors[i].direction, &c);
		assert_int_equal(c.line_rate_bps,
		    exact_vectors[i].line_rate_bps);
		for (n = 0; n < COUNT(levels); n++)
			if (c.rate_bps[levels[n]] != exact_vectors[i].bps[n])
				fail_msg("%s: %s: %llu, expected %llu: %s",
				    exact_vectors[i].file,
				    level_name(levels[n]), (unsigned long long)
				    c.rate_bps[levels[n]], (unsigned long long)
				    exact_vectors[i].bps[n],
				    exact_vectors[i].source);
	}
}

static void
models_of_examples_come_near_the_figures_by_hand(void **state)
{
	struct ceiling c;
	double ppm;
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(near_vectors); i++) {
		ceiling_of_example(near_vectors[i].file,
		    near_vectors[i].direction, &c);
		ppm = ((double)c.rate_bps[LEVEL_PAYLOAD] /
		    near_vectors[i].payload_bps - 1) * 1e6;
		if (ppm > near_vectors[i].within_ppm ||
		    ppm < -near_vectors[i].within_ppm)
			fail_msg("%s: %llu bit/s, %g ppm off: %s",
			    near_vectors[i].file, (unsigned long long)
			    c.rate_bps[LEVEL_PAYLOAD], ppm,
			    near_vectors[i].source);
	}
}

static bool
has_vector(const char *name)
{
	size_t i;

	for (i = 0; i < COUNT(exact_vectors); i++)
		if (strcmp(exact_vectors[i].file, name) == 0)
			return true;
	for (i = 0; i < COUNT(near_vectors); i++)
		if (strcmp(near_vectors[i].file, name) == 0)
			return true;
	return false;
}

/* One without a vector is a reference, and every kind of medium has one. */
static void
every_example_and_every_medium_is_tested(void **state)
{
	bool seen[64] = { false };
	struct circuit *circuit;
	struct dirent *entry;
	char name[256];
	size_t i, s;
	DIR *dir = opendir(FOLDER);

	(void)state;
	assert_non_null(dir);
	while ((entry = readdir(dir)) != NULL) {
		(void)snprintf(name, sizeof(name), "%s", entry->d_name);
		if (strstr(name, ".yaml") == NULL)
			continue;
		*strstr(name, ".yaml") = '\0';
		circuit = read_example(name);
		if (!has_vector(name) && !circuit_is_reference(circuit))
			fail_msg("%s has no vector", name);
		for (s = 0; s < circuit->segments_count; s++)
			for (i = 0; media[i] != NULL; i++)
				if (circuit->segments[s].medium.medium ==
				    media[i])
					seen[i] = true;
		circuit_free(circuit);
	}
	(void)closedir(dir);
	for (i = 0; media[i] != NULL; i++)
		if (!seen[i])
			fail_msg("no example of medium %s", media[i]->name);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(ladders_of_examples_equal_sums_by_hand),
		cmocka_unit_test(
		    models_of_examples_come_near_the_figures_by_hand),
		cmocka_unit_test(every_example_and_every_medium_is_tested),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
