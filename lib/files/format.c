#include "path.h"

#include <stdio.h>
#include <string.h>

static const char *const iq_words[] = {"by ending", "cf32", "ci16", "ci8", "cu8"};
static const char *const audio_words[] = {"by ending", "s16", "s24", "f32"};

const char *mb_iq_format_text(mb_iq_format format)
{
    return iq_words[format];
}

size_t mb_iq_format_bytes(mb_iq_format format)
{
    static const size_t bytes[] = {0, sizeof(mb_cf32), sizeof(mb_ci16), sizeof(mb_ci8), sizeof(mb_cu8)};

    return bytes[format];
}

mb_status mb_iq_format_parse(const char *word, mb_iq_format *format)
{
    for (int i = MB_IQ_CF32; i <= MB_IQ_CU8; i++) {
        if (strcmp(word, iq_words[i]) == 0) {
            *format = (mb_iq_format)i;
            return MB_OK;
        }
    }
    return mb_fail(MB_ERROR_ARGUMENT, "format", "\"%s\" is no IQ format; use one of cf32 ci16 ci8 cu8", word);
}

const char *mb_audio_format_text(mb_audio_format format)
{
    return audio_words[format];
}

mb_status mb_audio_format_parse(const char *word, mb_audio_format *format)
{
    for (int i = MB_AUDIO_S16; i <= MB_AUDIO_F32; i++) {
        if (strcmp(word, audio_words[i]) == 0) {
            *format = (mb_audio_format)i;
            return MB_OK;
        }
    }
    return mb_fail(MB_ERROR_ARGUMENT, "format", "\"%s\" is no audio format; use one of s16 s24 f32", word);
}

const char *mb_iq_endings(void)
{
    return ".sigmf-meta .wav .rf64 .cf32 .ci16 .ci8 .cu8";
}

const char *mb_audio_endings(void)
{
    return ".wav .flac .rf64";
}

mb_iq_format mb_iq_format_by_ending(const char *path)
{
    for (int i = MB_IQ_CF32; i <= MB_IQ_CU8; i++) {
        char ending[8];
        (void)snprintf(ending, sizeof ending, ".%s", mb_iq_format_text((mb_iq_format)i));
        if (mb_path_has_ending(path, ending)) {
            return (mb_iq_format)i;
        }
    }
    return MB_IQ_BY_ENDING;
}
