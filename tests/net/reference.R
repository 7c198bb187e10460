# SPDX-License-Identifier: GPL-3.0-or-later
# References of test_formulas.py, in R and not in the closed form where there is
# another way: Rscript reference.R FUNCTION, rows of arguments on standard input
# (CSV), a number a row on standard output.

boltzmann_j_per_k <- 1.380649e-23	# SI brochure, 9th edition: exact

# Shannon 1949, theorem 17: B log2(1 + S/N).
capacity <- function(hertz, snr_db)
	hertz * log1p(10^(snr_db / 10)) / log1p(1)

# The same of a receiver whose noise is k T B and its noise figure.
received <- function(hertz, level_dbm, figure_db, kelvin) {
	noise_w <- boltzmann_j_per_k * kelvin * hertz * 10^(figure_db / 10)
	capacity(hertz, 10 * log10(10^(level_dbm / 10) * 1e-3 / noise_w))
}

# Eb/N0 in dB at capacity: S/N over bits a second in each hertz.
energy <- function(snr_db)
	snr_db - 10 * log10(capacity(1, snr_db))

# Mean of the course window(top, t) over rounds(top) round trips, whose top is
# such that one packet of `packets` is lost: one a period.
period_mean <- function(window, rounds, packets) {
	sent <- function(top)
		integrate(function(t) window(top, t), 0, rounds(top),
		    rel.tol = 1e-11)$value
	found <- uniroot(function(x) log(sent(exp(x)) / packets),
	    c(log(1e-3), log(1e9)), tol = 1e-13)
	packets / rounds(exp(found$root))
}

# Mathis 1997: from half the top up by a segment each round trip.
mathis_window <- function(loss)
	period_mean(function(top, t) top / 2 + t, function(top) top / 2,
	    1 / loss)

# RFC 9438 section 4.2: W(t) = C (t - K)^3 + top, K when the top is reached again
# from beta * top; section 5: never less than Reno's.
cubic_window <- function(loss, round_trip_s) {
	c <- 0.4
	beta <- 0.7
	rounds <- function(top)
		(top * (1 - beta) / c)^(1 / 3) / round_trip_s
	own <- period_mean(function(top, t)
		c * ((t - rounds(top)) * round_trip_s)^3 + top, rounds,
	    1 / loss)
	max(own, 1.2 / sqrt(loss))
}

# RFC 5348 section 3.1 with b = 1 and t_RTO = 4 R; where its chance of a timeout
# would be above 1, RFC 3819 section 8.5.1.
pftk_window <- function(loss)
	1 / (sqrt(2 * loss / 3) + 4 * min(1, 3 * sqrt(3 * loss / 8)) * loss *
	    (1 + 32 * loss^2))

# RFC 3819 section 8.5.3: a wrong bit loses the frame.
frame_loss <- function(bit_error_ratio, octets)
	-expm1(8 * octets * log1p(-bit_error_ratio))

f <- get(commandArgs(TRUE)[1])
rows <- read.csv(file("stdin"), header = FALSE, colClasses = "numeric")
for (i in seq_len(nrow(rows)))
	cat(sprintf("%.17g\n", do.call(f, unname(as.list(rows[i, , drop = FALSE])))))
