/**
 * files.h - samples, tables and pictures in and out of files and pipes.
 *
 * An endpoint is a path whose ending names its kind, or "-" for a pipe (standard input or output).
 *   IQ     .sigmf-meta (with its .sigmf-data), .wav and .rf64 (two channels: I left, Q right),
 *          .cf32 .ci16 .ci8 .cu8 (raw, little endian, I first; the rate is given by the caller), "-" (raw)
 *   audio  .wav .flac .rf64, "-" (raw, one channel)
 *   table  any path, "-"
 *
 * Scales: a 16-bit sample is x * 32768, an 8-bit one x * 128, rounded to the nearest whole number and clamped
 * to the range of the type; reading divides by the same. The zero of cu8 lies half-way, at 127.5. (The 8-bit
 * samples of a .wav have their zero at 128, as that format says.) Clamped samples are counted.
 *
 * Outputs grow beside their name, as NAME.partial.ENDING, and take their name when committed; a writer killed
 * in the middle leaves a readable partial file. Pipes and devices such as /dev/null are written directly.
 *
 * All readers and writers belong to one thread at a time, allocate when opened and hold a fixed amount of
 * memory however long the input. Their functions are called from control threads: they read and write files.
 * Every failure is one sentence in mb_last_fault()->text with what, where and the remedy. Programs that write
 * to pipes should ignore SIGPIPE, so that a closed pipe is such a sentence, too. A read that a signal handler
 * breaks off returns MB_ERROR_INTERRUPTED; nothing is lost and the same call may be made again.
 */
#ifndef MIRRORBAND_FILES_H
#define MIRRORBAND_FILES_H

#include "mirrorband/core.h"

#ifdef __cplusplus
extern "C" {
#endif

/* ---- endpoints and formats ----------------------------------------------------------------------------- */

/** What kind of thing an endpoint names. */
typedef enum mb_endpoint {
    MB_ENDPOINT_PATH,         /* a file (or anything else with a path) */
    MB_ENDPOINT_PIPE,         /* "-" */
    MB_ENDPOINT_SOUND_DEVICE, /* "audio:NAME" */
    MB_ENDPOINT_RADIO         /* "radio:ARGUMENTS" */
} mb_endpoint;

/** Kind of an endpoint by its text alone. Thread: any. */
MB_API mb_endpoint mb_endpoint_kind(const char *text);

/** How complex samples are stored. */
typedef enum mb_iq_format {
    MB_IQ_BY_ENDING = 0, /* not given: the ending or the header tells */
    MB_IQ_CF32,          /* two 32-bit floats, full scale 1.0 */
    MB_IQ_CI16,          /* two signed 16-bit, full scale 32768 */
    MB_IQ_CI8,           /* two signed 8-bit, full scale 128 */
    MB_IQ_CU8            /* two unsigned 8-bit, zero 127.5, full scale 128 */
} mb_iq_format;

/** Word of a format: "cf32", "ci16", "ci8", "cu8"; "by ending" for MB_IQ_BY_ENDING. Thread: any. */
MB_API const char *mb_iq_format_text(mb_iq_format format);

/** Bytes of one complex sample; 0 for MB_IQ_BY_ENDING. Thread: any. */
MB_API size_t mb_iq_format_bytes(mb_iq_format format);

/** Reads a format word. Errors: ARGUMENT with the words accepted. Thread: control. */
MB_API mb_status mb_iq_format_parse(const char *word, mb_iq_format *format);

/** How real samples are stored. */
typedef enum mb_audio_format {
    MB_AUDIO_BY_ENDING = 0, /* not given: the header tells; 16 bit when writing a file */
    MB_AUDIO_S16,           /* signed 16-bit */
    MB_AUDIO_S24,           /* signed 24-bit; in files only */
    MB_AUDIO_F32            /* 32-bit float; not in .flac */
} mb_audio_format;

/** Word of a format: "s16", "s24", "f32"; "by ending" for MB_AUDIO_BY_ENDING. Thread: any. */
MB_API const char *mb_audio_format_text(mb_audio_format format);

/** Reads a format word. Errors: ARGUMENT with the words accepted. Thread: control. */
MB_API mb_status mb_audio_format_parse(const char *word, mb_audio_format *format);

/** Endings taken for IQ and for audio, as text for messages and help, such as ".wav .flac .rf64". Thread:
 * any. */
MB_API const char *mb_iq_endings(void);
MB_API const char *mb_audio_endings(void);

/**
 * True when both paths name the same file: equal text, or the same file on disk through links; of a SigMF
 * pair both parts are compared. "-" equals nothing. To be asked before an output replaces an input. Thread:
 * control.
 */
MB_API bool mb_files_same(const char *path_a, const char *path_b);

/* ---- IQ in --------------------------------------------------------------------------------------------- */

typedef struct mb_iq_reader mb_iq_reader;

/** What the caller knows about the input. */
typedef struct mb_iq_open {
    mb_iq_format format; /* "-": needed; raw paths: overrides the ending; else leave MB_IQ_BY_ENDING */
    double rate_hz;      /* raw input: needed, up to 1e12; SigMF: taken if the file states none; else 0 */
    size_t channel;      /* which I/Q pair of a recording with several, 1..n; 0 = the only one */
    bool rewindable; /* a pipe is copied to an unlinked temporary file (TMPDIR) so that it can be rewound */
    bool verify;     /* SigMF: read the data once when opening and hold it against core:sha512 */
} mb_iq_open;

/** Format by ending, no rate, not rewindable. Thread: any. */
MB_API mb_iq_open mb_iq_open_default(void);

/** What the input says about itself. */
typedef struct mb_iq_info {
    mb_iq_format format;   /* as stored; a .wav of other than 16-bit integers counts as cf32 */
    double rate_hz;        /* samples per second */
    bool has_centre;       /* whether centre_hz is known */
    double centre_hz;      /* radio frequency of 0 Hz, of the first capture */
    uint64_t samples;      /* complex samples; 0 = unknown (pipe) */
    size_t channels;       /* I/Q pairs per instant */
    size_t captures;       /* SigMF: capture segments; else 0 */
    size_t annotations;    /* SigMF: annotations; else 0 */
    char description[256]; /* SigMF core:description, cut to fit; else "" */
    char datetime[64];     /* SigMF core:datetime of the first capture; else "" */
} mb_iq_info;

/** Counters of a reader, since opening or rewinding. */
typedef struct mb_iq_reader_state {
    uint64_t samples;       /* complex samples handed out */
    uint64_t non_finite;    /* of them NaN or infinite, handed out as zero */
    uint64_t at_full_scale; /* of them with a part at the end of an integer range: clipped when recorded */
    double peak;            /* largest |part| so far, full scale 1.0 */
} mb_iq_reader_state;

/** A stretch of one tuning. SigMF captures; in order of sample_start. */
typedef struct mb_iq_capture {
    uint64_t sample_start; /* complex samples from the start */
    bool has_frequency;
    double frequency_hz; /* radio frequency of 0 Hz from here on */
    char datetime[64];   /* ISO 8601 or "" */
} mb_iq_capture;

/** A remark about a part of a recording. */
typedef struct mb_iq_annotation {
    uint64_t sample_start;       /* complex samples from the start */
    uint64_t sample_count;       /* 0 = to the end of the recording */
    bool has_edges;              /* whether the two frequencies below are given */
    double low_hz, high_hz;      /* radio frequencies of the lower and the upper edge */
    bool suppressed_carrier_dsb; /* signal:detail {analog, dsb, suppressed_carrier} of extension signal 1.0.0
                                  */
    char label[64];              /* core:label or "" */
    char comment[256];           /* core:comment or "" */
} mb_iq_annotation;

/**
 * Opens IQ samples for reading. path: see the top of this file; options may be NULL for the defaults.
 * *out is the caller's, to be closed; NULL on failure. A file is checked here as a whole: kind, header, odd
 * byte counts, length against the header; a pipe as it is read. Errors: ARGUMENT (a field of options), FILE
 * (missing, not readable), FORMAT (empty, truncated, damaged, not what its ending says), UNSUPPORTED (ending,
 * datatype), MEMORY. Thread: control.
 */
MB_API mb_status mb_iq_reader_open(const char *path, const mb_iq_open *options, mb_iq_reader **out);

/** What is known about the input. Thread: control. */
MB_API mb_iq_info mb_iq_reader_info(const mb_iq_reader *reader);

/** Counters so far. Thread: control. */
MB_API mb_iq_reader_state mb_iq_reader_state_of(const mb_iq_reader *reader);

/** The index-th capture, 0 .. info.captures - 1. Errors: ARGUMENT. Thread: control. */
MB_API mb_status mb_iq_reader_capture(const mb_iq_reader *reader, size_t index, mb_iq_capture *capture);

/** The index-th annotation, 0 .. info.annotations - 1. Errors: ARGUMENT. Thread: control. */
MB_API mb_status mb_iq_reader_annotation(const mb_iq_reader *reader, size_t index,
                                         mb_iq_annotation *annotation);

/**
 * Reads up to n samples into out; *got tells how many, also when it fails. Less than n only at the end or on
 * a failure; 0 and MB_OK = nothing is left. Non-finite samples become zero and are counted. Errors: FILE,
 * FORMAT (cut in the middle of a sample, or shorter than the header says; what came before has been handed
 * out), INTERRUPTED. Thread: control.
 */
MB_API mb_status mb_iq_read(mb_iq_reader *reader, mb_cf32 *out, size_t n, size_t *got);

/**
 * The same without conversion, for inputs whose info.format is MB_IQ_CI16. Both may be mixed.
 * Errors: those of mb_iq_read; UNSUPPORTED for other formats. Thread: control.
 */
MB_API mb_status mb_iq_read_ci16(mb_iq_reader *reader, mb_ci16 *out, size_t n, size_t *got);

/** Goes back to the first sample. Errors: UNSUPPORTED (pipe opened without .rewindable), FILE. Thread:
 * control. */
MB_API mb_status mb_iq_rewind(mb_iq_reader *reader);

/** Closes and frees; accepts NULL. Thread: control. */
MB_API void mb_iq_reader_close(mb_iq_reader *reader);

/* ---- IQ out -------------------------------------------------------------------------------------------- */

typedef struct mb_iq_writer mb_iq_writer;

/** What is to be written. Texts and annotations are copied. */
typedef struct mb_iq_writer_settings {
    mb_iq_format format; /* "-": needed; raw: by ending; SigMF: cf32 if not given; .wav .rf64: ci16 or cf32
                            (default) */
    double rate_hz;      /* 1 to 1e12; whole Hz in .wav and .rf64 */
    bool has_centre;     /* whether centre_hz is known */
    double centre_hz;    /* radio frequency of 0 Hz; SigMF only */
    const char *description; /* SigMF core:description; NULL = none */
    const char *author;      /* SigMF core:author; NULL = none */
    const char *datetime;    /* SigMF core:datetime of the first sample, ISO 8601 with Z; NULL = none */
    const mb_iq_annotation *annotations; /* SigMF; may be NULL */
    size_t annotation_count;
    bool sha512; /* SigMF: hash the data while writing and state core:sha512 */
} mb_iq_writer_settings;

/** Counters of a writer. */
typedef struct mb_iq_writer_state {
    uint64_t samples;    /* complex samples taken */
    uint64_t clipped;    /* of them with a part clamped to the range of an integer format */
    uint64_t non_finite; /* of them NaN or infinite, written as zero */
} mb_iq_writer_state;

/** Format by ending, rate 0 (to be set), nothing else. Thread: any. */
MB_API mb_iq_writer_settings mb_iq_writer_settings_default(void);

/**
 * Starts an output beside its name. *out is the caller's, to be destroyed; NULL on failure.
 * Errors: ARGUMENT (a field), UNSUPPORTED (ending, or a format the container does not hold), FILE (folder
 * missing or not writable, target write-protected or a folder), MEMORY. Thread: control.
 */
MB_API mb_status mb_iq_writer_create(const char *path, const mb_iq_writer_settings *settings,
                                     mb_iq_writer **out);

/** Appends n samples. Errors: FILE (disk full, pipe closed), UNSUPPORTED (.wav beyond 4 GiB). Thread:
 * control. */
MB_API mb_status mb_iq_writer_write(mb_iq_writer *writer, const mb_cf32 *samples, size_t n);

/** The same without conversion when the format is MB_IQ_CI16; converts otherwise. Thread: control. */
MB_API mb_status mb_iq_writer_write_ci16(mb_iq_writer *writer, const mb_ci16 *samples, size_t n);

/** Adds an annotation (SigMF; ignored elsewhere). Errors: MEMORY. Thread: control. */
MB_API mb_status mb_iq_writer_annotate(mb_iq_writer *writer, const mb_iq_annotation *annotation);

/** Counters so far; valid until destroyed. Thread: control. */
MB_API mb_iq_writer_state mb_iq_writer_state_of(const mb_iq_writer *writer);

/**
 * Finishes the output and gives it its name. On failure nothing appears under the name and the partial file
 * is removed. Afterwards only _state_of and _destroy may be called. Errors: FILE. Thread: control.
 */
MB_API mb_status mb_iq_writer_commit(mb_iq_writer *writer);

/** For an interrupt: as commit, and a SigMF description says that the recording was interrupted. Thread:
 * control. */
MB_API mb_status mb_iq_writer_keep_partial(mb_iq_writer *writer);

/** Removes what was written; what stood under the name before stays. Accepts NULL. Thread: control. */
MB_API void mb_iq_writer_abandon(mb_iq_writer *writer);

/** Frees; an output neither committed nor kept is abandoned. Accepts NULL. Thread: control. */
MB_API void mb_iq_writer_destroy(mb_iq_writer *writer);

/* ---- audio in ------------------------------------------------------------------------------------------ */

typedef struct mb_audio_reader mb_audio_reader;

/** What the caller knows about the input. */
typedef struct mb_audio_open {
    mb_audio_format format; /* "-": MB_AUDIO_S16 or MB_AUDIO_F32; files: leave MB_AUDIO_BY_ENDING */
    double rate_hz;         /* "-": needed; files: 0 */
    size_t channel;         /* which channel of a file, 1..n; 0 = the only one, several are refused */
    bool rewindable; /* a pipe is copied to an unlinked temporary file (TMPDIR) so that it can be rewound */
} mb_audio_open;

/** Everything from the file, the only channel. Thread: any. */
MB_API mb_audio_open mb_audio_open_default(void);

/** What the input says about itself. */
typedef struct mb_audio_info {
    double rate_hz;
    uint64_t samples; /* per channel; 0 = unknown (pipe) */
    size_t channels;
    mb_audio_format
        format; /* nearest of the formats above that holds the stored samples; f32 for any other */
} mb_audio_info;

/** Counters of a reader, since opening or rewinding. */
typedef struct mb_audio_reader_state {
    uint64_t samples;       /* handed out */
    uint64_t non_finite;    /* of them NaN or infinite, handed out as zero */
    uint64_t at_full_scale; /* of them at the end of an integer range: clipped when recorded */
    double peak;            /* largest |sample| so far, full scale 1.0 */
} mb_audio_reader_state;

/**
 * Opens audio for reading. options may be NULL for the defaults. *out is the caller's, to be closed.
 * Errors: as mb_iq_reader_open. Thread: control.
 */
MB_API mb_status mb_audio_reader_open(const char *path, const mb_audio_open *options, mb_audio_reader **out);
/** What is known about the input. Thread: control. */
MB_API mb_audio_info mb_audio_reader_info(const mb_audio_reader *reader);
/** Counters so far. Thread: control. */
MB_API mb_audio_reader_state mb_audio_reader_state_of(const mb_audio_reader *reader);
/** Reads up to n samples; less only at the end, 0 = nothing is left. Errors: FILE, FORMAT. Thread: control.
 */
MB_API mb_status mb_audio_read(mb_audio_reader *reader, float *out, size_t n, size_t *got);
/** Goes back to the first sample. Errors: UNSUPPORTED (pipe opened without .rewindable), FILE. Thread:
 * control. */
MB_API mb_status mb_audio_rewind(mb_audio_reader *reader);
/** Closes and frees; accepts NULL. Thread: control. */
MB_API void mb_audio_reader_close(mb_audio_reader *reader);

/* ---- audio out ----------------------------------------------------------------------------------------- */

typedef struct mb_audio_writer mb_audio_writer;

/** What is to be written: one channel. */
typedef struct mb_audio_writer_settings {
    mb_audio_format format; /* files: 16 bit if not given; "-": MB_AUDIO_S16 or MB_AUDIO_F32, needed */
    double rate_hz;         /* 1 to 655350 (.flac), to 2147483647 (others); whole Hz in files */
} mb_audio_writer_settings;

/** Counters of a writer. */
typedef struct mb_audio_writer_state {
    uint64_t samples;    /* taken */
    uint64_t clipped;    /* of them clamped to the range of an integer format */
    uint64_t non_finite; /* of them NaN or infinite, written as zero */
} mb_audio_writer_state;

/** 16 bit in files, rate 0 (to be set). Thread: any. */
MB_API mb_audio_writer_settings mb_audio_writer_settings_default(void);
/** Starts an output beside its name. Errors: as mb_iq_writer_create. Thread: control. */
MB_API mb_status mb_audio_writer_create(const char *path, const mb_audio_writer_settings *settings,
                                        mb_audio_writer **out);
/** Appends n samples. Errors: FILE (disk full, pipe closed), UNSUPPORTED (.wav beyond 4 GiB). Thread:
 * control. */
MB_API mb_status mb_audio_writer_write(mb_audio_writer *writer, const float *samples, size_t n);
/** Counters so far; valid until destroyed. Thread: control. */
MB_API mb_audio_writer_state mb_audio_writer_state_of(const mb_audio_writer *writer);
/** Finishes the output and gives it its name; see mb_iq_writer_commit. Errors: FILE. Thread: control. */
MB_API mb_status mb_audio_writer_commit(mb_audio_writer *writer);
/** For an interrupt: the same as commit. Thread: control. */
MB_API mb_status mb_audio_writer_keep_partial(mb_audio_writer *writer);
/** Removes what was written; what stood under the name before stays. Accepts NULL. Thread: control. */
MB_API void mb_audio_writer_abandon(mb_audio_writer *writer);
/** Frees; an output neither committed nor kept is abandoned. Accepts NULL. Thread: control. */
MB_API void mb_audio_writer_destroy(mb_audio_writer *writer);

/* ---- tables (CSV) -------------------------------------------------------------------------------------- */

/*
 * UTF-8 text: lines that begin with '#' are remarks, the first other line names the columns (letters, digits
 * and
 * '_', the unit at the end: "time_s", "carrier_offset_hz"), every further line holds one number a column.
 * Decimal point only, whatever the locale; "nan", "inf" and "-inf" are numbers; an empty field reads as nan.
 */

enum { MB_TABLE_COLUMNS_MAX = 64 };

typedef struct mb_table_writer mb_table_writer;

/**
 * Starts a table beside its name. columns: column_count names, 1 to MB_TABLE_COLUMNS_MAX, each once.
 * remark: text for '#' lines at the top, may hold line breaks; NULL = none. "-" writes to standard output.
 * Errors: ARGUMENT, FILE, MEMORY. Thread: control.
 */
MB_API mb_status mb_table_writer_create(const char *path, const char *const *columns, size_t column_count,
                                        const char *remark, mb_table_writer **out);
/**
 * Appends one row of column_count values, each with as many digits (at most 17) as it takes to read back the
 * very same double. Errors: FILE. Thread: control.
 */
MB_API mb_status mb_table_writer_row(mb_table_writer *writer, const double *values);
/** Finishes the table and gives it its name; see mb_iq_writer_commit. Errors: FILE. Thread: control. */
MB_API mb_status mb_table_writer_commit(mb_table_writer *writer);
/** For an interrupt: as commit, with a last '#' line that says so. Thread: control. */
MB_API mb_status mb_table_writer_keep_partial(mb_table_writer *writer);
/** Removes what was written. Accepts NULL. Thread: control. */
MB_API void mb_table_writer_abandon(mb_table_writer *writer);
/** Frees; a table neither committed nor kept is abandoned. Accepts NULL. Thread: control. */
MB_API void mb_table_writer_destroy(mb_table_writer *writer);

typedef struct mb_table_reader mb_table_reader;

/**
 * Opens a table and reads its line of names. columns: the column_count columns wanted, in the order in which
 * rows are to be handed out; NULL and 0 = all, in the order of the file. Other columns are skipped unread.
 * Errors: FILE, FORMAT (empty, no names, a wanted column is missing: the sentence lists those there are),
 * MEMORY. Thread: control.
 */
MB_API mb_status mb_table_reader_open(const char *path, const char *const *columns, size_t column_count,
                                      mb_table_reader **out);
/** Number of columns of the file. Thread: control. */
MB_API size_t mb_table_reader_column_count(const mb_table_reader *reader);
/** Name of the index-th column of the file; NULL beyond the last. Thread: control. */
MB_API const char *mb_table_reader_column(const mb_table_reader *reader, size_t index);
/** Whether the file has a column of that name. Thread: control. */
MB_API bool mb_table_reader_has(const mb_table_reader *reader, const char *name);
/**
 * Reads the next row into values (as many as wanted when opening); *more is false at the end of the table.
 * Errors: FORMAT with "FILE:LINE: " and what is wrong, FILE. Thread: control.
 */
MB_API mb_status mb_table_reader_row(mb_table_reader *reader, double *values, bool *more);
/** Closes and frees; accepts NULL. Thread: control. */
MB_API void mb_table_reader_close(mb_table_reader *reader);

/* ---- pictures (SVG) ------------------------------------------------------------------------------------ */

/*
 * A figure is a title over a grid of panels, each with two axes, lines, points and a legend. Text stays text;
 * colours follow the reader's light or dark preference and can be told apart by colour-blind readers (palette
 * of Okabe and Ito, 2008). Units are pixels of an SVG at its natural size. Everything handed over is copied.
 */

typedef struct mb_plot mb_plot;

/** The figure as a whole. */
typedef struct mb_plot_settings {
    const char *title;      /* heading; NULL = none */
    const char *subtitle;   /* one smaller line below it; NULL = none */
    size_t columns;         /* panels side by side, 1 to 4 */
    double panel_width_px;  /* of one panel with its labels, 240 to 2000 */
    double panel_height_px; /* 160 to 2000 */
} mb_plot_settings;

/** One axis of a panel. */
typedef struct mb_plot_axis {
    const char *label; /* such as "frequency"; NULL = none */
    const char *unit;  /* such as "Hz", shown in brackets; NULL = none */
    double low, high;  /* range shown; both NAN = from the data, y widened to whole ticks */
} mb_plot_axis;

/** One panel. */
typedef struct mb_plot_panel_settings {
    const char *title; /* NULL = none */
    mb_plot_axis x, y;
    size_t column_span; /* columns taken, 1 .. columns */
    bool equal_scale;   /* one unit is equally long on both axes (phase pictures) */
} mb_plot_panel_settings;

/** How a series is drawn. */
typedef enum mb_plot_style {
    MB_PLOT_LINE,   /* poly-line; not-a-number interrupts it */
    MB_PLOT_DASHED, /* the same, dashed */
    MB_PLOT_POINTS  /* dots; thinned by the caller */
} mb_plot_style;

/** One series of a panel. */
typedef struct mb_plot_series {
    const char *label; /* entry of the legend; NULL = none */
    mb_plot_style style;
    int colour;      /* 0 to 7 from the palette; -1 = the next one of the panel */
    double width_px; /* of the line, or diameter of a dot; 0 = 1.5 (line), 3 (dot) */
    double opacity;  /* 0 to 1; 0 = 1 for lines, 0.5 for dots */
    const double *x, *y;
    size_t count;
} mb_plot_series;

/** One column of panels of 480 by 300 px. Thread: any. */
MB_API mb_plot_settings mb_plot_settings_default(void);
/** No texts, ranges from the data, one column. Thread: any. */
MB_API mb_plot_panel_settings mb_plot_panel_settings_default(void);
/** A line without label in the next colour. Thread: any. */
MB_API mb_plot_series mb_plot_series_default(void);

/** Starts a figure. settings may be NULL for the defaults. Errors: ARGUMENT (a field), MEMORY. Thread:
 * control. */
MB_API mb_status mb_plot_create(const mb_plot_settings *settings, mb_plot **out);
/**
 * Adds a panel behind the last one (row by row); the following series and marks go there. At most 64.
 * Errors: ARGUMENT (a field, or too many), MEMORY. Thread: control.
 */
MB_API mb_status mb_plot_panel(mb_plot *plot, const mb_plot_panel_settings *settings);
/** Adds a series to the last panel. Lines of many points are reduced without visible change. At most 32 a
 * panel. Errors: ARGUMENT, MEMORY. Thread: control. */
MB_API mb_status mb_plot_add(mb_plot *plot, const mb_plot_series *series);
/** A thin dashed line right across the last panel at one value of y (horizontal) or x (vertical), in the
 * colour of the axes. label: entry of the legend or NULL. Errors: ARGUMENT, MEMORY. Thread: control. */
MB_API mb_status mb_plot_mark_y(mb_plot *plot, double y, const char *label);
MB_API mb_status mb_plot_mark_x(mb_plot *plot, double x, const char *label);
/** A line of figures under the title of the last panel, such as "carrier -61.2 dBc". Errors: MEMORY. Thread:
 * control. */
MB_API mb_status mb_plot_note(mb_plot *plot, const char *text);
/** Writes the figure; it appears under its name when complete. "-" = standard output. Errors: ARGUMENT (no
 * panel), FILE, MEMORY. Thread: control. */
MB_API mb_status mb_plot_write(const mb_plot *plot, const char *path);
/** Accepts NULL. Thread: control. */
MB_API void mb_plot_destroy(mb_plot *plot);

#ifdef __cplusplus
}
#endif

#endif
