/** iq_reader.h - what opening and reading of IQ share. Room-internal. */
#ifndef MIRRORBAND_FILES_IQ_READER_H
#define MIRRORBAND_FILES_IQ_READER_H

#include "sigmf.h"
#include "sound.h"
#include "source.h"

enum { MB_IQ_BLOCK = 8192, MB_IQ_CHANNELS_MAX = 64 };

struct mb_iq_reader {
    mb_source *source; /* raw samples, or NULL */
    mb_sound *sound;   /* .wav, .rf64, or NULL */
    mb_sigmf meta;
    mb_iq_info info;
    mb_iq_reader_state state;
    size_t pair;           /* which I/Q pair, from 0 */
    size_t frame_bytes;    /* one instant of all pairs, as stored */
    unsigned char *frames; /* MB_IQ_BLOCK instants, when there are several pairs */
    unsigned char *stored; /* MB_IQ_BLOCK samples of the pair, before conversion */
    size_t carried;        /* bytes of an instant cut by a signal, kept at the front of carry */
    unsigned char carry[MB_IQ_CHANNELS_MAX * sizeof(mb_cf32)];
};

/** Refuses a length in bytes that is no multiple of a sample. */
mb_status mb_iq_check_whole(const mb_iq_reader *reader, const char *name, uint64_t bytes);

#endif
