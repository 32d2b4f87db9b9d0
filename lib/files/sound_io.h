/** sound_io.h - what reading and writing of sound files share. Room-internal. */
#ifndef MIRRORBAND_FILES_SOUND_IO_H
#define MIRRORBAND_FILES_SOUND_IO_H

#include "sound.h"

struct mb_sound {
    SNDFILE *handle;
    SF_INFO info;
    mb_source *source; /* one of these two is there */
    mb_sink *sink;
    mb_status status;      /* of the source or the sink, which libsndfile does not pass on */
    uint64_t frames;       /* read or written */
    uint64_t header_frame; /* when the header is next brought up to date, so that a killed writer leaves a
                              valid file */
    size_t frame_bytes;
};

/** What libsndfile calls to reach the source or the sink. */
SF_VIRTUAL_IO mb_sound_io(void);

#endif
