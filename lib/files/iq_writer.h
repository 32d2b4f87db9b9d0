/** iq_writer.h - what starting and writing of IQ share. Room-internal. */
#ifndef MIRRORBAND_FILES_IQ_WRITER_H
#define MIRRORBAND_FILES_IQ_WRITER_H

#include "sigmf.h"
#include "sink.h"
#include "sound.h"

enum { MB_IQ_WRITE_BLOCK = 8192 };

struct mb_iq_writer {
    mb_iq_format format;
    mb_sink *data;   /* raw samples, or NULL */
    mb_sink *meta;   /* of a SigMF pair, or NULL */
    mb_sound *sound; /* .wav, .rf64, or NULL */
    mb_sigmf about;
    size_t annotation_room;
    bool hashing;
    mb_sha512 hash;
    mb_iq_writer_state state;
    mb_cf32 *clean;        /* MB_IQ_WRITE_BLOCK samples, made finite */
    unsigned char *stored; /* MB_IQ_WRITE_BLOCK samples as stored */
};

/** Writes the metadata of a SigMF pair as it stands now. */
mb_status mb_iq_write_meta(mb_iq_writer *writer);

#endif
