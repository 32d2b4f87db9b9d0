/** sniff.h - looks at the first bytes: is this what its name says, and is it all there? Room-internal. */
#ifndef MIRRORBAND_FILES_SNIFF_H
#define MIRRORBAND_FILES_SNIFF_H

#include "source.h"

/** Refuses raw samples that begin like a WAV, RF64, FLAC or JSON file. kind: what they should be, such as
 * "ci16". */
mb_status mb_sniff_raw(mb_source *source, const char *kind);

/** Refuses text, and a WAV or RF64 file shorter than its header says. Leaves the source at its start. */
mb_status mb_sniff_sound(mb_source *source, bool flac);

#endif
