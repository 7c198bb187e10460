/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <linux/tcp.h>
#include <netinet/in.h>
#include <string.h>
#include <sys/socket.h>
#include <unistd.h>

#include "sampler.h"

/* Our fields by the names of the kernel's own header: its layout is the
 * outside check of our offsets.  rcv_wnd came later than this header. */
#define PAIRS(X)						\
	X(snd_mss_bytes, tcpi_snd_mss)				\
	X(rcv_mss_bytes, tcpi_rcv_mss)				\
	X(unacked_packets, tcpi_unacked)			\
	X(pmtu_bytes, tcpi_pmtu)				\
	X(rtt_us, tcpi_rtt)					\
	X(rttvar_us, tcpi_rttvar)				\
	X(snd_ssthresh_packets, tcpi_snd_ssthresh)		\
	X(snd_cwnd_packets, tcpi_snd_cwnd)			\
	X(reordering_packets, tcpi_reordering)			\
	X(rcv_rtt_us, tcpi_rcv_rtt)				\
	X(rcv_space_bytes, tcpi_rcv_space)			\
	X(total_retrans_packets, tcpi_total_retrans)		\
	X(pacing_rate_bytes_per_s, tcpi_pacing_rate)		\
	X(bytes_acked, tcpi_bytes_acked)			\
	X(bytes_received, tcpi_bytes_received)			\
	X(segs_out_packets, tcpi_segs_out)			\
	X(segs_in_packets, tcpi_segs_in)			\
	X(notsent_bytes, tcpi_notsent_bytes)			\
	X(min_rtt_us, tcpi_min_rtt)				\
	X(data_segs_in_packets, tcpi_data_segs_in)		\
	X(data_segs_out_packets, tcpi_data_segs_out)		\
	X(delivery_rate_bytes_per_s, tcpi_delivery_rate)	\
	X(busy_us, tcpi_busy_time)				\
	X(rwnd_limited_us, tcpi_rwnd_limited)			\
	X(sndbuf_limited_us, tcpi_sndbuf_limited)		\
	X(delivered_packets, tcpi_delivered)			\
	X(delivered_ce_packets, tcpi_delivered_ce)		\
	X(bytes_sent, tcpi_bytes_sent)				\
	X(bytes_retrans, tcpi_bytes_retrans)			\
	X(dsack_dups_packets, tcpi_dsack_dups)			\
	X(reord_seen, tcpi_reord_seen)				\
	X(rcv_ooopack_packets, tcpi_rcv_ooopack)		\
	X(snd_wnd_bytes, tcpi_snd_wnd)

static void
every_field_is_read_where_the_kernel_header_has_it(void **state)
{
	struct tcp_info info;
	struct tcp_sample sample;
	unsigned seen = 0;

	(void)state;
#define CHECK(ours, theirs)						\
	memset(&info, 0, sizeof(info));					\
	info.theirs = 4000000001u;					\
	sampler_decode((const unsigned char *)&info, sizeof(info),	\
	    &sample);							\
	assert_int_equal(sample.value[TCP_SAMPLE_##ours], 4000000001u);	\
	for (unsigned i = 0; i < TCP_SAMPLE_rcv_wnd_bytes; i++)		\
		if (i != TCP_SAMPLE_##ours)				\
			assert_int_equal(sample.value[i], 0);		\
	seen++;
	PAIRS(CHECK)
#undef CHECK
	/* all but rcv_wnd, the last */
	assert_int_equal(seen, TCP_SAMPLE_COUNT - 1);
}

struct place {
	unsigned field;
	size_t end;
};

#define PLACE(name, offset, bytes) { TCP_SAMPLE_##name, (offset) + (bytes) },

static void
a_field_is_known_only_if_the_answer_covers_it(void **state)
{
	static const struct place places[] = { TCP_SAMPLE_FIELDS(PLACE) };
	unsigned char info[SAMPLER_INFO_BYTES];

	(void)state;
	memset(info, 1, sizeof(info));
	for (size_t size = 0; size <= sizeof(info); size++) {
		struct tcp_sample sample;

		sampler_decode(info, size, &sample);
		for (size_t i = 0; i < sizeof(places) / sizeof(*places); i++)
			assert_int_equal(sample.value[places[i].field] !=
			    UNKNOWN_U64, size >= places[i].end);
	}
}

static void
a_smallest_round_trip_of_all_ones_is_unknown(void **state)
{
	struct tcp_info info;
	struct tcp_sample sample;

	(void)state;
	memset(&info, 0, sizeof(info));
	info.tcpi_min_rtt = UINT32_MAX;
	info.tcpi_rtt = UINT32_MAX;
	sampler_decode((const unsigned char *)&info, sizeof(info), &sample);
	assert_true(sample.value[TCP_SAMPLE_min_rtt_us] == UNKNOWN_U64);
	assert_true(sample.value[TCP_SAMPLE_rtt_us] == UINT32_MAX);
}

static void
a_connected_socket_answers_and_a_pipe_does_not(void **state)
{
	struct sockaddr_in at = { .sin_family = AF_INET,
	    .sin_addr.s_addr = htonl(INADDR_LOOPBACK) };
	socklen_t size = sizeof(at);
	int listener = socket(AF_INET, SOCK_STREAM, 0);
	int fd = socket(AF_INET, SOCK_STREAM, 0);
	int ends[2];
	struct tcp_sample sample;

	(void)state;
	assert_int_equal(bind(listener, (struct sockaddr *)&at, size), 0);
	assert_int_equal(listen(listener, 1), 0);
	assert_int_equal(getsockname(listener, (struct sockaddr *)&at, &size),
	    0);
	assert_int_equal(connect(fd, (struct sockaddr *)&at, size), 0);
	sampler_read(fd, &sample);
	assert_in_range(sample.value[TCP_SAMPLE_snd_mss_bytes], 500, 65535);
	assert_in_range(sample.value[TCP_SAMPLE_snd_cwnd_packets], 1, 1000);
	assert_int_equal(pipe(ends), 0);
	sampler_read(ends[0], &sample);
	for (unsigned i = 0; i < TCP_SAMPLE_COUNT; i++)
		assert_true(sample.value[i] == UNKNOWN_U64);
	(void)close(ends[0]);
	(void)close(ends[1]);
	(void)close(fd);
	(void)close(listener);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(
		    every_field_is_read_where_the_kernel_header_has_it),
		cmocka_unit_test(
		    a_field_is_known_only_if_the_answer_covers_it),
		cmocka_unit_test(a_smallest_round_trip_of_all_ones_is_unknown),
		cmocka_unit_test(
		    a_connected_socket_answers_and_a_pipe_does_not),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
