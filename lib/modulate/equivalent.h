/** equivalent.h - an mb_equivalent from what a model does to a full-scale sine (modulate room). */
#ifndef MB_MODULATE_EQUIVALENT_H
#define MB_MODULATE_EQUIVALENT_H

#include "mirrorband/modulate.h"

/**
 * cosine[k]: amplitude at the carrier of the k-th harmonic of the message, for a message cos x, so that the
 * output near the carrier is sum_k cosine[k] cos(k x) cos(carrier). audio: amplitude of cos x itself in the
 * output. Uses T2(u) = 2 (u^2 - 1/2) and T3(u) = 4 (u^3 - 3u/4).
 */
mb_equivalent mb_equivalent_of_sine(const double cosine[4], double audio, double message_peak_v);

#endif
