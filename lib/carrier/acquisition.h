/** acquisition.h - decides from repeated looks whether, and where, there is a suppressed carrier. */
#ifndef CARRIER_ACQUISITION_H
#define CARRIER_ACQUISITION_H

#include "mirrorband/carrier.h"

/** Looks that agreed one after another. */
typedef struct agreement {
    double offset_hz;
    unsigned count;
} agreement;

typedef struct acquisition {
    mb_sighter *brief;   /* short stretch: quick, for strong signals */
    mb_sighter *lasting; /* long stretch: for weak signals and for checking a lock */
    agreement brief_looks;
    agreement lasting_looks;
    unsigned ticks; /* looks asked for, to make the long one at every third */
} acquisition;

mb_status acquisition_create(const mb_recovery_settings *settings, acquisition *out);
void acquisition_destroy(acquisition *a);
void acquisition_reset(acquisition *a);

/** Samples of the longest stretch looked at. */
size_t acquisition_length(const acquisition *a);

/**
 * One look, to be called every 20 ms, at the samples that end at `end`. True when enough looks agree; *found
 * then is the sighting and *length its stretch in samples, which ends at `end`.
 */
bool acquisition_look(acquisition *a, const mb_cf32 *end, mb_sighting *found, size_t *length);

/** One long look for checking a lock: what there is at offset_hz, and *elsewhere, the best candidate of the
 * span. */
mb_sighting acquisition_check(acquisition *a, const mb_cf32 *end, double offset_hz, mb_sighting *elsewhere);

#endif
