/** bench.h - the parts of the benchmark and what they share. */
#ifndef TESTS_BENCH_H
#define TESTS_BENCH_H

/** Each measures one thing and prints its lines. */
void bench_decimate(void);
void bench_receive(void);

/** Median of `count` values, at most 64; their order is changed. */
double bench_median(double *values, int count);

/** Prints a status that is not a success and ends the program. */
void bench_require(int status);

#endif
