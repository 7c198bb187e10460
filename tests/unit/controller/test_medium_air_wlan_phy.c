/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "declare/wlan_airtime.h"
#include "medium_air.h"

#define LEGACY(bps) wlan_phy_of_rate(bps, false)

static struct wlan_phy
phy_of(enum wlan_generation generation, uint64_t width_mhz, uint64_t mcs,
    uint64_t streams, uint64_t guard_ns)
{
	const struct wlan_mode mode = { generation, width_mhz, mcs, streams,
		guard_ns };

	return wlan_phy_of_mode(&mode);
}

/* MCS tables of one stream, Mbit/s to one decimal. */
static const struct {
	enum wlan_generation generation;
	uint64_t width_mhz, guard_ns;
	double rate_mbps[15];	/* by MCS; 0: not defined */
	const char *source;
} one_stream[] = {
	{ WLAN_N, 20, 800, { 6.5, 13, 19.5, 26, 39, 52, 58.5, 65 },
	  "IEEE 802.11-2020 table 19-27 (from memory)" },
	{ WLAN_N, 20, 400, { 7.2, 14.4, 21.7, 28.9, 43.3, 57.8, 65,
	  72.2 }, "same" },
	{ WLAN_N, 40, 800, { 13.5, 27, 40.5, 54, 81, 108, 121.5, 135 },
	  "IEEE 802.11-2020 table 19-31 (from memory)" },
	{ WLAN_N, 40, 400, { 15, 30, 45, 60, 90, 120, 135, 150 },
	  "same" },
	{ WLAN_AC, 20, 800, { 6.5, 13, 19.5, 26, 39, 52, 58.5, 65,
	  78 }, "IEEE 802.11-2020 table 21-29 (from memory)" },
	{ WLAN_AC, 40, 400, { 15, 30, 45, 60, 90, 120, 135, 150, 180,
	  200 }, "IEEE 802.11-2020 table 21-37 (from memory)" },
	{ WLAN_AC, 80, 800, { 29.3, 58.5, 87.8, 117, 175.5, 234,
	  263.3, 292.5, 351, 390 },
	  "IEEE 802.11-2020 table 21-45 (from memory)" },
	{ WLAN_AC, 80, 400, { 32.5, 65, 97.5, 130, 195, 260, 292.5,
	  325, 390, 433.3 }, "same" },
	{ WLAN_AC, 160, 800, { 58.5, 117, 175.5, 234, 351, 468, 526.5,
	  585, 702, 780 },
	  "IEEE 802.11-2020 table 21-53 (from memory)" },
	{ WLAN_AC, 160, 400, { 65, 130, 195, 260, 390, 520, 585, 650,
	  780, 866.7 }, "same" },
	{ WLAN_AX, 20, 800, { 8.6, 17.2, 25.8, 34.4, 51.6, 68.8, 77.4,
	  86, 103.2, 114.7, 129, 143.4 },
	  "IEEE 802.11ax-2021 section 27.5 (from memory)" },
	{ WLAN_AX, 20, 1600, { 8.1, 16.3, 24.4, 32.5, 48.8, 65, 73.1,
	  81.3, 97.5, 108.3, 121.9, 135.4 }, "same" },
	{ WLAN_AX, 20, 3200, { 7.3, 14.6, 21.9, 29.3, 43.9, 58.5,
	  65.8, 73.1, 87.8, 97.5, 109.7, 121.9 }, "same" },
	{ WLAN_AX, 40, 800, { 17.2, 34.4, 51.6, 68.8, 103.2, 137.6,
	  154.9, 172.1, 206.5, 229.4, 258.1, 286.8 }, "same" },
	{ WLAN_AX, 80, 800, { 36, 72.1, 108.1, 144.1, 216.2, 288.2,
	  324.3, 360.3, 432.4, 480.4, 540.4, 600.5 }, "same" },
	{ WLAN_AX, 160, 800, { 72.1, 144.1, 216.2, 288.2, 432.4,
	  576.5, 648.5, 720.6, 864.7, 960.8, 1080.9, 1201 }, "same" },
	{ WLAN_BE, 20, 800, { 8.6, 17.2, 25.8, 34.4, 51.6, 68.8, 77.4,
	  86, 103.2, 114.7, 129, 143.4, 154.9, 172.1 },
	  "IEEE 802.11be-2024 section 36.5 (from memory)" },
	{ WLAN_BE, 40, 800, { 17.2, 34.4, 51.6, 68.8, 103.2, 137.6,
	  154.9, 172.1, 206.5, 229.4, 258.1, 286.8, 309.7, 344.1 },
	  "same" },
	{ WLAN_BE, 80, 800, { 36, 72.1, 108.1, 144.1, 216.2, 288.2,
	  324.3, 360.3, 432.4, 480.4, 540.4, 600.5, 648.5, 720.6 },
	  "same" },
	{ WLAN_BE, 160, 800, { 72.1, 144.1, 216.2, 288.2, 432.4,
	  576.5, 648.5, 720.6, 864.7, 960.8, 1080.9, 1201, 1297.1,
	  1441.2 }, "same" },
	{ WLAN_BE, 320, 800, { 144.1, 288.2, 432.4, 576.5, 864.7,
	  1152.9, 1297.1, 1441.2, 1729.4, 1921.6, 2161.8, 2402,
	  2594.1, 2882.4 }, "same" },
};

static void
rates_of_one_stream_are_those_of_the_standards_tables(void **state)
{
	size_t i, mcs;

	(void)state;
	for (i = 0; i < COUNT(one_stream); i++)
		for (mcs = 0; one_stream[i].rate_mbps[mcs] > 0; mcs++)
			assert_near(fraction_double(phy_of(
			    one_stream[i].generation,
			    one_stream[i].width_mhz, mcs, 1,
			    one_stream[i].guard_ns).rate_bps) / 1e6,
			    one_stream[i].rate_mbps[mcs], 0.0501,
			    one_stream[i].source);
}

/* F1 to F8: equal to the Linux kernel's cfg80211_calculate_bitrate(), except
 * 16 streams, which are 8 times 5764.7. */
static void
rates_agree_with_the_kernels(void **state)
{
	static const struct {
		const char *id;
		enum wlan_generation generation;
		uint64_t width_mhz, mcs, streams, guard_ns;
		double rate_mbps;
	} vectors[] = {
		{ "F1", WLAN_N, 20, 7, 1, 800, 65.0 },
		{ "F1", WLAN_N, 20, 7, 1, 400, 72.2 },
		{ "F2", WLAN_N, 40, 7, 2, 400, 300.0 },
		{ "F2", WLAN_N, 40, 7, 4, 400, 600.0 },
		{ "F3", WLAN_AC, 80, 9, 1, 400, 433.3 },
		{ "F3", WLAN_AC, 80, 9, 2, 400, 866.7 },
		{ "F3", WLAN_AC, 80, 9, 3, 400, 1300.0 },
		{ "F3", WLAN_AC, 80, 9, 4, 400, 1733.3 },
		{ "F4", WLAN_AC, 160, 9, 4, 400, 3466.7 },
		{ "F5", WLAN_AX, 20, 11, 1, 800, 143.4 },
		{ "F5", WLAN_AX, 40, 11, 1, 800, 286.8 },
		{ "F5", WLAN_AX, 80, 11, 1, 800, 600.5 },
		{ "F5", WLAN_AX, 160, 11, 1, 800, 1201.0 },
		{ "F6", WLAN_AX, 160, 11, 1, 1600, 1134.3 },
		{ "F6", WLAN_AX, 160, 11, 1, 3200, 1020.8 },
		{ "F7", WLAN_AX, 160, 11, 8, 800, 9607.8 },
		{ "F8", WLAN_BE, 320, 13, 1, 800, 2882.4 },
		{ "F8", WLAN_BE, 320, 13, 2, 800, 5764.7 },
		{ "F8", WLAN_BE, 320, 13, 8, 800, 23058.8 },
		{ "F8", WLAN_BE, 320, 13, 16, 800, 46117.6 },
	};
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++)
		assert_near(fraction_double(phy_of(vectors[i].generation,
		    vectors[i].width_mhz, vectors[i].mcs, vectors[i].streams,
		    vectors[i].guard_ns).rate_bps) / 1e6, vectors[i].rate_mbps,
		    0.0501, vectors[i].id);
}

static void
rates_are_exact_quotients(void **state)
{
	struct fraction rate;

	(void)state;
	rate = phy_of(WLAN_N, 20, 7, 1, 400).rate_bps;	/* 260 bit / 3.6 us */
	assert_int_equal(fraction_compare(rate,
	    fraction_make(650000000, 9)), 0);
	rate = phy_of(WLAN_AX, 80, 11, 1, 800).rate_bps;
	assert_int_equal(fraction_compare(rate,
	    fraction_make(UINT64_C(980) * 10 * 5 * 1000000000,
	    6 * 13600)), 0);
}

/* ns-3, src/wifi/test/tx-duration-test.cc; where it rounds neither the short
 * guard interval to 4 us nor shortens the HE-LTF of 8 us, that is undone. */
static void
durations_are_those_of_a_simulators_regression_test(void **state)
{
	const struct wlan_phy ht20 = phy_of(WLAN_N, 20, 7, 1, 800);
	const struct wlan_phy ht40 = phy_of(WLAN_N, 40, 7, 1, 400);
	const struct wlan_phy ht20_low = phy_of(WLAN_N, 20, 0, 1, 400);
	const struct wlan_phy he20 = phy_of(WLAN_AX, 20, 0, 1, 800);
	const struct wlan_phy he80 = phy_of(WLAN_AX, 80, 11, 1, 800);
	const struct wlan_phy he160 = phy_of(WLAN_AX, 160, 0, 1, 3200);
	struct wlan_phy phy = LEGACY(54000000);

	(void)state;
	assert_int_equal(wlan_frame_ns(&phy, 1536), 248000);
	assert_int_equal(wlan_frame_ns(&phy, 76), 32000);
	assert_int_equal(wlan_frame_ns(&phy, 14), 24000);
	assert_int_equal(wlan_frame_ns(&ht20, 1536), 228000);
	assert_int_equal(wlan_frame_ns(&ht20, 14), 40000);
	assert_int_equal(36000 + wlan_symbols(&ht40, 1536) * 3600, 118800);
	assert_int_equal(wlan_frame_ns(&ht40, 1536), 120000);
	assert_int_equal(36000 + wlan_symbols(&ht20_low, 1536) * 3600,
	    1742400);
	assert_int_equal(wlan_frame_ns(&ht20_low, 1536), 1744000);
	assert_int_equal(44000 + wlan_symbols(&he20, 1536) * 13600, 1485600);
	assert_int_equal(44000 + wlan_symbols(&he80, 1536) * 13600, 71200);
	assert_int_equal(44000 + wlan_symbols(&he160, 1536) * 16000, 252000);
	phy = LEGACY(11000000);
	assert_int_equal(wlan_data_ns(&phy, 1023), 744000);
	assert_int_equal(wlan_data_ns(&phy, 1024), 745000);
	assert_int_equal(wlan_data_ns(&phy, 1025), 746000);
	assert_int_equal(wlan_data_ns(&phy, 1026), 747000);
}

/* By hand: bits = 16 + 8 octets over the bits of a symbol, rounded up. */
static void
a_symbol_more_begins_at_the_right_bit(void **state)
{
	const struct wlan_phy ht20 = phy_of(WLAN_N, 20, 7, 1, 800);
	const struct wlan_phy he20 = phy_of(WLAN_AX, 20, 0, 1, 800);
	const struct wlan_phy slow = LEGACY(5500000);

	(void)state;
	assert_int_equal(wlan_symbols(&ht20, 63), 2);	/* 520 of 260 */
	assert_int_equal(wlan_symbols(&ht20, 64), 3);
	assert_int_equal(wlan_symbols(&he20, 42), 4);	/* 352 of 117 */
	assert_int_equal(wlan_data_ns(&slow, 11), 16000);
	assert_int_equal(wlan_data_ns(&slow, 12), 18000);
	assert_int_equal(LEGACY(6000000).around_bits, 16 + 6);
	assert_int_equal(LEGACY(1000000).around_bits, 0);
	assert_int_equal(ht20.around_bits, 16);
	/* N_DBPS is floor(N_CBPS R): 9800 * 5/6 */
	assert_int_equal(fraction_floor(phy_of(WLAN_AX, 80, 11, 1,
	    800).symbol_bits), 8166);
}

/* Fields of the PPDU: ns-3 vht-phy.cc and eht-phy.cc; durations of SIG-B and
 * EHT, and the number of training fields, from memory. */
static void
preambles_grow_with_the_streams(void **state)
{
	static const struct {
		enum wlan_generation generation;
		uint64_t guard_ns, streams_max;
		double us[8];
	} vectors[] = {
		{ WLAN_N, 800, 4, { 36, 40, 48, 48 } },
		{ WLAN_AC, 400, 8, { 40, 44, 52, 52, 60, 60, 68, 68 } },
		{ WLAN_AX, 800, 8, { 43.2, 50.4, 64.8, 64.8, 79.2, 79.2, 93.6,
		  93.6 } },
		{ WLAN_AX, 1600, 8, { 44, 52, 68, 68, 84, 84, 100, 100 } },
		{ WLAN_AX, 3200, 2, { 52, 68 } },
		{ WLAN_BE, 800, 8, { 47.2, 54.4, 68.8, 68.8, 83.2, 83.2, 97.6,
		  97.6 } },
	};
	size_t i, n;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++)
		for (n = 0; n < vectors[i].streams_max; n++)
			assert_near((double)phy_of(vectors[i].generation, 20,
			    0, n + 1, vectors[i].guard_ns).preamble_ns / 1e3,
			    vectors[i].us[n], 1e-9, "preamble");
	assert_int_equal(LEGACY(6000000).preamble_ns, 20000);
	assert_int_equal(LEGACY(2000000).preamble_ns, 192000);
	assert_int_equal(wlan_phy_of_rate(2000000, true).preamble_ns, 96000);
}

/* Linux net/mac80211/rc80211_minstrel_ht.c; 160 MHz: CWNA study guide. */
static void
vht_leaves_ten_modes_undefined(void **state)
{
	static const uint64_t widths[] = { 20, 40, 80, 160 };
	struct wlan_mode mode = { .generation = WLAN_AC };
	size_t w, undefined = 0;
	bool expected;

	(void)state;
	for (w = 0; w < COUNT(widths); w++)
		for (mode.mcs = 0; mode.mcs <= 9; mode.mcs++)
			for (mode.streams = 1; mode.streams <= 8;
			    mode.streams++) {
				mode.width_mhz = widths[w];
				expected = !((widths[w] == 20 &&
				    mode.mcs == 9 && mode.streams % 3 != 0) ||
				    (widths[w] == 80 && mode.mcs == 6 &&
				    mode.streams % 4 == 3) ||
				    (widths[w] == 80 && mode.mcs == 9 &&
				    mode.streams == 6) ||
				    (widths[w] == 160 && mode.mcs == 9 &&
				    mode.streams == 3));
				assert_int_equal(wlan_mode_defined(&mode),
				    expected);
				undefined += !expected;
			}
	assert_int_equal(undefined, 10);
	mode = (struct wlan_mode){ WLAN_AX, 20, 9, 1, 800 };
	assert_true(wlan_mode_defined(&mode));
}

/* IEEE 802.11-2020 section 10.6.6.5 and table 10-10. */
static void
control_frames_refer_to_the_rates_of_a_and_g(void **state)
{
	static const uint64_t rate_mbps[] = { 6, 12, 18, 24, 36, 48, 54, 54, 54,
		54, 54, 54, 54, 54 };
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(rate_mbps); i++)
		assert_int_equal(wlan_reference_rate(i),
		    rate_mbps[i] * 1000000);
	assert_string_equal(wlan_modulation_name(0), "BPSK 1/2");
	assert_string_equal(wlan_modulation_name(13), "4096-QAM 5/6");
	for (i = 0; wlan_ofdm_rates_kbps[i] != 0; i++)
		assert_true(wlan_rate_known(wlan_ofdm_rates_kbps,
		    wlan_ofdm_rates_kbps[i] * 1000));
	assert_int_equal(i, 8);
	assert_false(wlan_rate_known(wlan_ofdm_rates_kbps, 11000000));
	assert_true(wlan_rate_known(wlan_dsss_rates_kbps, 5500000));
}

/* Linux net/mac80211/util.c, ieee80211_set_wmm_default(); include/linux/
 * ieee80211.h. */
static void
timing_and_limits_are_those_of_the_standards(void **state)
{
	static const struct {
		enum wlan_generation generation;
		enum wlan_band band;
		bool long_slot;
		uint64_t slot_us, sifs_us, wait_us, extension_us;
		uint64_t backoff_tenths_us;
	} vectors[] = {
		{ WLAN_B, WLAN_2_4_GHZ, false, 20, 10, 50, 6, 3100 },
		{ WLAN_A, WLAN_5_GHZ, false, 9, 16, 34, 0, 675 },
		{ WLAN_G, WLAN_2_4_GHZ, false, 9, 10, 28, 6, 675 },
		{ WLAN_G, WLAN_2_4_GHZ, true, 20, 10, 50, 6, 1500 },
		{ WLAN_N, WLAN_5_GHZ, false, 9, 16, 43, 0, 675 },
		{ WLAN_AX, WLAN_6_GHZ, false, 9, 16, 43, 0, 675 },
	};
	struct wlan_access access;
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		access = wlan_access_of(vectors[i].generation,
		    vectors[i].band, vectors[i].long_slot);
		assert_int_equal(access.slot_ns, vectors[i].slot_us * 1000);
		assert_int_equal(access.sifs_ns, vectors[i].sifs_us * 1000);
		assert_int_equal(access.sifs_ns + access.wait_slots *
		    access.slot_ns, vectors[i].wait_us * 1000);
		assert_int_equal(access.extension_ns,
		    vectors[i].extension_us * 1000);
		assert_int_equal(access.contention_slots * access.slot_ns / 2,
		    vectors[i].backoff_tenths_us * 100);
	}
	assert_int_equal(wlan_standards[WLAN_N].ampdu_octets, 65535);
	assert_int_equal(wlan_standards[WLAN_AC].ampdu_octets, 1048575);
	assert_int_equal(wlan_standards[WLAN_AX].ampdu_octets, 6500631);
	assert_int_equal(wlan_standards[WLAN_BE].ampdu_octets, 15523198);
	assert_int_equal(wlan_standards[WLAN_N].mcs_max, 7);
	assert_int_equal(wlan_standards[WLAN_N].streams_max, 4);
	for (i = WLAN_AC; i <= WLAN_BE; i++)
		assert_int_equal(wlan_standards[i].streams_max, 8);
	assert_int_equal(wlan_standards[WLAN_N].window_frames, 64);
	assert_int_equal(wlan_standards[WLAN_AC].window_frames, 64);
	assert_int_equal(wlan_standards[WLAN_AX].window_frames, 256);
	assert_int_equal(wlan_standards[WLAN_BE].window_frames, 1024);
	assert_int_equal(wlan_block_ack_octets(1), 32);
	assert_int_equal(wlan_block_ack_octets(64), 32);
	assert_int_equal(wlan_block_ack_octets(65), 56);
	assert_int_equal(wlan_block_ack_octets(256), 56);
	assert_int_equal(wlan_block_ack_octets(512), 88);
	assert_int_equal(wlan_block_ack_octets(513), 152);
	assert_int_equal(wlan_block_ack_octets(1024), 152);
}

/* A data frame and the frame of its TCP acknowledgement, each waited for and
 * answered, without backoff. */
static uint64_t
transaction_ns(const struct wlan_phy *phy, const struct wlan_access *access)
{
	struct wlan_exchange data, ack;

	wlan_exchange_make(phy, access, 1536, 1, &data);
	wlan_exchange_make(phy, access, 76, 1, &ack);
	assert_int_equal(data.backoff_ns, 0);
	return wlan_exchange_ns(&data) + wlan_exchange_ns(&ack);
}

/* F9 to F11: M. Gast, "When Is 54 Not Equal to 54?", 2003. */
static void
transactions_are_those_of_a_published_study(void **state)
{
	static const struct {
		const char *id;
		enum wlan_generation generation;
		enum wlan_band band;
		uint64_t bps;
		enum wlan_protection protection;
		uint64_t us, per_second;
		double rate_mbps;
	} vectors[] = {
		{ "F9", WLAN_B, WLAN_2_4_GHZ, 11000000, WLAN_PROTECTION_NONE,
		  2084, 479, 5.6 },
		{ "F10", WLAN_A, WLAN_5_GHZ, 54000000, WLAN_PROTECTION_NONE,
		  428, 2336, 27.3 },
		{ "F10", WLAN_G, WLAN_2_4_GHZ, 54000000, WLAN_PROTECTION_NONE,
		  428, 2336, 27.3 },
		{ "F11", WLAN_G, WLAN_2_4_GHZ, 54000000, WLAN_PROTECTION_CTS,
		  898, 1113, 13.0 },
		{ "F11", WLAN_G, WLAN_2_4_GHZ, 54000000, WLAN_PROTECTION_RTS,
		  1332, 750, 8.8 },
	};
	struct wlan_access access;
	struct wlan_phy phy;
	uint64_t ns;
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		phy = LEGACY(vectors[i].bps);
		access = wlan_access_of(vectors[i].generation,
		    vectors[i].band, vectors[i].protection !=
		    WLAN_PROTECTION_NONE);
		access.contention_slots = 0;
		access.answer = phy;
		access.protection = vectors[i].protection;
		access.guard = LEGACY(11000000);
		ns = transaction_ns(&phy, &access);
		assert_int_equal(ns, vectors[i].us * 1000);
		assert_int_equal(1000000000 / ns, vectors[i].per_second);
		assert_near(1460 * 8 * 1e3 / (double)ns, vectors[i].rate_mbps,
		    0.051, vectors[i].id);
	}
}

/* By hand, at 1 Mbit/s, where every octet is 8 us: ACK 14, RTS 20, CTS 14. */
static void
control_frames_have_their_octets(void **state)
{
	struct wlan_access access = wlan_access_of(WLAN_B, WLAN_2_4_GHZ,
	    false);
	const struct wlan_phy phy = LEGACY(1000000);
	struct wlan_exchange exchange;

	(void)state;
	access.answer = access.guard = phy;
	wlan_exchange_make(&phy, &access, 100, 1, &exchange);
	assert_int_equal(exchange.answer_ns, (192 + 8 * 14) * 1000);
	assert_int_equal(exchange.protection_ns, 0);
	access.protection = WLAN_PROTECTION_CTS;
	wlan_exchange_make(&phy, &access, 100, 1, &exchange);
	assert_int_equal(exchange.protection_ns, (192 + 8 * 14 + 10) * 1000);
	access.protection = WLAN_PROTECTION_RTS;
	wlan_exchange_make(&phy, &access, 100, 1, &exchange);
	assert_int_equal(exchange.protection_ns, (192 + 8 * 20 + 10 + 192 +
	    8 * 14 + 10) * 1000);
	/* OFDM at 2.4 GHz: 6 us after each of the three */
	access.guard = LEGACY(24000000);
	wlan_exchange_make(&phy, &access, 100, 1, &exchange);
	assert_int_equal(exchange.protection_ns, (28 + 6 + 10 + 28 + 6 + 10) *
	    1000);
}

/* aPPDUMaxTime 5484 us; by hand: 84 + 375 * 14.4 is that, 56 + 377 * 14.4 is
 * 0.8 us more. */
static void
an_ampdu_lasts_no_longer_than_5484_us(void **state)
{
	const struct wlan_phy six = phy_of(WLAN_AX, 20, 0, 6, 1600);
	const struct wlan_phy two = phy_of(WLAN_BE, 20, 0, 2, 1600);
	struct wlan_access access = wlan_access_of(WLAN_AX, WLAN_5_GHZ,
	    false);
	struct wlan_exchange exchange;

	(void)state;
	access.answer = LEGACY(24000000);
	access.aggregated = true;
	access.ampdu_octets = 6500631;
	access.window_frames = 256;
	wlan_exchange_make(&six, &access, 16444, 256, &exchange);
	assert_int_equal(exchange.frames, 2);
	assert_int_equal(exchange.data_ns + exchange.preamble_ns, 5484000);
	wlan_exchange_make(&two, &access, 5504, 256, &exchange);
	assert_int_equal(wlan_frame_ns(&two, 2 * 5508), 5484800);
	assert_int_equal(exchange.frames, 1);
	/* The length limits too, to the octet: 3 * 1560 = 4680. */
	access.ampdu_octets = 4680;
	wlan_exchange_make(&six, &access, 1554, 256, &exchange);
	assert_int_equal(exchange.subframe_octets, 1560);
	assert_int_equal(exchange.frames, 3);
	access.ampdu_octets = 4679;
	wlan_exchange_make(&six, &access, 1554, 256, &exchange);
	assert_int_equal(exchange.frames, 2);
	access.ampdu_octets = 1;
	wlan_exchange_make(&six, &access, 1554, 256, &exchange);
	assert_int_equal(exchange.frames, 1);
	access.ampdu_octets = 6500631;
	wlan_exchange_make(&six, &access, 1553, 2, &exchange);
	assert_int_equal(exchange.subframe_octets, 1560);
	wlan_exchange_make(&six, &access, 1556, 2, &exchange);
	assert_int_equal(exchange.subframe_octets, 1560);
	assert_int_equal(exchange.frames, 2);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(
		    rates_of_one_stream_are_those_of_the_standards_tables),
		cmocka_unit_test(rates_agree_with_the_kernels),
		cmocka_unit_test(rates_are_exact_quotients),
		cmocka_unit_test(
		    durations_are_those_of_a_simulators_regression_test),
		cmocka_unit_test(a_symbol_more_begins_at_the_right_bit),
		cmocka_unit_test(preambles_grow_with_the_streams),
		cmocka_unit_test(vht_leaves_ten_modes_undefined),
		cmocka_unit_test(control_frames_refer_to_the_rates_of_a_and_g),
		cmocka_unit_test(timing_and_limits_are_those_of_the_standards),
		cmocka_unit_test(transactions_are_those_of_a_published_study),
		cmocka_unit_test(control_frames_have_their_octets),
		cmocka_unit_test(an_ampdu_lasts_no_longer_than_5484_us),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
