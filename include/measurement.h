/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * measurement: what one agent saw of one trial.
 *
 * Time is the agent's CLOCK_MONOTONIC_RAW.  The receiver's zero is the first
 * byte of the last stream to start.  Rows are finished intervals; totals are
 * over the counted window.  Pure data, filled by the agent, carried by the
 * wire, borrowed by judge and report.
 */
#ifndef PLAFOND_MEASUREMENT_H
#define PLAFOND_MEASUREMENT_H

#include <stdbool.h>
#include <stdint.h>

#include "trial.h"

#define UNKNOWN_U64 UINT64_MAX		/* a value nobody knows */
#define MEASUREMENT_STREAMS_SAMPLED 8	/* TCP_INFO of all up to so many */
#define SHA256_HEX_SIZE 65

/* TCP_INFO fields kept a row and stream; UNKNOWN_U64 where the kernel did not
 * return them (its returned length decides, never the compile-time header). */
#define TCP_SAMPLE_FIELDS(X)	/* name, offset, bytes: facts of tcp.h */ \
	X(snd_mss_bytes, 16, 4)			\
	X(rcv_mss_bytes, 20, 4)			\
	X(unacked_packets, 24, 4)		\
	X(pmtu_bytes, 60, 4)			\
	X(rtt_us, 68, 4)			\
	X(rttvar_us, 72, 4)			\
	X(snd_ssthresh_packets, 76, 4)		\
	X(snd_cwnd_packets, 80, 4)		\
	X(reordering_packets, 88, 4)		\
	X(rcv_rtt_us, 92, 4)			\
	X(rcv_space_bytes, 96, 4)		\
	X(total_retrans_packets, 100, 4)	\
	X(pacing_rate_bytes_per_s, 104, 8)	\
	X(bytes_acked, 120, 8)			\
	X(bytes_received, 128, 8)		\
	X(segs_out_packets, 136, 4)		\
	X(segs_in_packets, 140, 4)		\
	X(notsent_bytes, 144, 4)		\
	X(min_rtt_us, 148, 4)			\
	X(data_segs_in_packets, 152, 4)		\
	X(data_segs_out_packets, 156, 4)	\
	X(delivery_rate_bytes_per_s, 160, 8)	\
	X(busy_us, 168, 8)			\
	X(rwnd_limited_us, 176, 8)		\
	X(sndbuf_limited_us, 184, 8)		\
	X(delivered_packets, 192, 4)		\
	X(delivered_ce_packets, 196, 4)		\
	X(bytes_sent, 200, 8)			\
	X(bytes_retrans, 208, 8)		\
	X(dsack_dups_packets, 216, 4)		\
	X(reord_seen, 220, 4)			\
	X(rcv_ooopack_packets, 224, 4)		\
	X(snd_wnd_bytes, 228, 4)		\
	X(rcv_wnd_bytes, 232, 4)

#define TCP_SAMPLE_ENUM(name, offset, bytes) TCP_SAMPLE_##name,
enum tcp_sample_field { TCP_SAMPLE_FIELDS(TCP_SAMPLE_ENUM) TCP_SAMPLE_COUNT };
#undef TCP_SAMPLE_ENUM

struct tcp_sample {
	uint64_t value[TCP_SAMPLE_COUNT];
};

/* One finished interval at one agent in one direction, all workers added. */
struct interval_row {
	uint64_t number;	/* from 0 */
	uint64_t end_ns;	/* since the direction's zero at this agent */
	uint64_t bytes;		/* payload: received, or handed to the kernel */
	uint64_t cpu_ns;	/* CPU time of this direction's workers */
	uint64_t steal_ns;	/* stolen from this machine; UNKNOWN_U64 */
};

/* One stream at the end of one interval. */
struct stream_row {
	uint64_t number;	/* of the interval */
	uint64_t stream;	/* 0..streams-1 */
	uint64_t bytes;		/* of this stream in this interval */
	struct tcp_sample tcp;
};

/* One worker thread in one interval. */
struct worker_row {
	uint64_t number;	/* of the interval */
	uint64_t worker;	/* 0..workers-1 */
	uint64_t cpu_ns;	/* CPU time of its thread */
};

/* Why a transfer ended at an agent. */
enum measurement_end {
	MEASUREMENT_COMPLETE,	/* the window closed */
	MEASUREMENT_STOPPED,	/* the controller or a signal stopped it */
	MEASUREMENT_PEER_LOST,	/* a stream broke or the controller vanished */
	MEASUREMENT_ENDS
};
extern const char *const measurement_end_names[MEASUREMENT_ENDS + 1];
const char *measurement_end_name(enum measurement_end end);

/* Totals of one direction at one agent. */
struct measurement {
	enum direction direction;	/* single */
	bool is_receiver;
	enum measurement_end end;
	char why[128];		/* of MEASUREMENT_PEER_LOST, else "" */
	uint64_t zero_ns;	/* agent's session clock at the zero */
	uint64_t settle_ns;	/* as it came out; receiver only */
	uint64_t duration_ns;	/* of the window; receiver only */
	bool settled;		/* two 1 s means agreed before the limit */
	uint64_t bytes;		/* in the window (receiver), or handed over */
	uint64_t row_min_bps;	/* least and greatest row of the window; */
	uint64_t row_max_bps;	/* receiver only, else 0 */
	uint64_t cpu_ns;	/* over all rows */
	uint64_t steal_ns;	/* over all rows, UNKNOWN_U64 */
	uint64_t cpu_busiest_ratio_ppm;	/* busiest worker's share of one core */
	uint64_t rows;		/* interval rows handed over */
	uint64_t stream_rows;	/* stream rows handed over */
	uint64_t worker_rows;	/* worker rows handed over */
	uint64_t streams;
	uint64_t elapsed_ns;	/* first to last row */
	uint64_t interface_bytes;	/* kernel's counter of the interface
				 * over the trial, or UNKNOWN_U64 */
	char congestion_control[TRIAL_CONGESTION_CONTROL_SIZE];
	struct tcp_sample last;	/* of stream 0, at the end */
	char sha256[SHA256_HEX_SIZE];	/* over the rows, as sent */
};

#endif
