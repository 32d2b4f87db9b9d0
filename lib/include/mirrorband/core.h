/**
 * core.h - what every room shares: sample types, status codes, faults, memory, random numbers, quantities.
 *
 * Thread tags used in all headers of the library:
 *   control  called while setting up or tearing down; may allocate, lock or plan; never from a stream
 *   stream   real-time safe: no allocation, lock, file or print; one thread at a time per object
 *   any      may be called from anywhere at any time
 */
#ifndef MIRRORBAND_CORE_H
#define MIRRORBAND_CORE_H

#include <stdarg.h>
#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#ifdef __cplusplus
extern "C" {
#endif

#if defined(MB_BUILDING)
#define MB_API __attribute__((visibility("default")))
#else
#define MB_API
#endif

#define MB_PI 3.14159265358979323846

/** Complex sample, in-phase and quadrature; full scale is 1.0 on each. Layout equals float[2]. */
typedef struct mb_cf32 {
    float re, im;
} mb_cf32;

/** Complex 16-bit sample; full scale 32768. */
typedef struct mb_ci16 {
    int16_t re, im;
} mb_ci16;

/** Complex 8-bit sample; full scale 128. */
typedef struct mb_ci8 {
    int8_t re, im;
} mb_ci8;

/** Complex unsigned 8-bit sample; zero at 127.5 or 128, see files.h. */
typedef struct mb_cu8 {
    uint8_t re, im;
} mb_cu8;

/** What a function returns. Values are pinned: scripts and bindings may rely on them. */
typedef enum mb_status {
    MB_OK = 0,
    MB_ERROR_ARGUMENT = -1,    /* an argument or a settings field is out of its range */
    MB_ERROR_MEMORY = -2,      /* memory could not be had */
    MB_ERROR_FILE = -3,        /* the system refused to open, read, write or rename */
    MB_ERROR_FORMAT = -4,      /* the content is not what its name or header says, or is damaged */
    MB_ERROR_CONFIG = -5,      /* a config file or --set is wrong */
    MB_ERROR_UNSUPPORTED = -6, /* correct, but not offered here */
    MB_ERROR_NO_SIGNAL = -7,   /* no suppressed-carrier signal was found */
    MB_ERROR_INTERRUPTED = -8  /* stopped on request; what was written so far is valid */
} mb_status;

/** Name of a status in words, for logs. Thread: any. */
MB_API const char *mb_status_text(mb_status status);

/** The last failure of this thread: which field, and one clear sentence with range and remedy. */
typedef struct mb_fault {
    mb_status status;
    char field[64];
    char text[1024];
} mb_fault;

/** Failure of the last call on this thread that did not return MB_OK. Valid until the next one. Thread: any.
 */
MB_API const mb_fault *mb_last_fault(void);

/**
 * Records a failure and returns its status, so that a function can end with `return mb_fail(...)`.
 * field: name of the settings field, key or file concerned ("" if none); the sentence is printf-like.
 * Thread: control (it formats text).
 */
MB_API mb_status mb_fail(mb_status status, const char *field, const char *format, ...)
    __attribute__((format(printf, 3, 4)));

/**
 * Returns MB_OK when low <= value <= high and value is finite; else records "field must be between LOW and
 * HIGH UNIT; it is VALUE" and returns MB_ERROR_ARGUMENT. Thread: control.
 */
MB_API mb_status mb_check_range(const char *field, double value, double low, double high, const char *unit);

typedef enum mb_log_level { MB_LOG_DEBUG, MB_LOG_INFO, MB_LOG_WARNING } mb_log_level;

/** Receives log lines; may be called from control threads only. Must not call back into the library. */
typedef void (*mb_log_callback)(void *user, mb_log_level level, const char *line);

/** Sets who receives log lines; NULL (the default) drops them. Thread: control, before other threads start.
 */
MB_API void mb_log_set(mb_log_callback callback, void *user);

/** Sends one printf-like line to the log callback. Thread: control. */
MB_API void mb_log(mb_log_level level, const char *format, ...) __attribute__((format(printf, 2, 3)));

/** Zeroed memory for count objects of size bytes, aligned to 64 bytes; NULL when it cannot be had. Thread:
 * control. */
MB_API void *mb_allocate(size_t count, size_t size);

/** Gives memory of mb_allocate back; accepts NULL. Thread: control. */
MB_API void mb_release(void *memory);

/**
 * For tests of failing memory: asked before each allocation, false makes it fail. NULL restores the default.
 * Thread: control, before other threads start.
 */
MB_API void mb_allocation_gate_set(bool (*gate)(void *user, size_t bytes), void *user);

/** Version of the library, such as "0.1.0". Thread: any. */
MB_API const char *mb_version(void);

/** Monotonic time in seconds from an arbitrary origin. Thread: any. */
MB_API double mb_clock_s(void);

/* ---- random numbers ------------------------------------------------------------------------------------ */

/** xoshiro256++ generator (Blackman and Vigna, 2019); equal seeds give equal numbers on every machine. */
typedef struct mb_random {
    uint64_t word[4];
    double spare;
    bool has_spare;
} mb_random;

/** Starts a generator; different streams of one seed are independent. Thread: any. */
MB_API void mb_random_seed(mb_random *random, uint64_t seed, uint64_t stream);

/** 64 random bits. Thread: stream. */
MB_API uint64_t mb_random_bits(mb_random *random);

/** Uniform in [0, 1). Thread: stream. */
MB_API double mb_random_uniform(mb_random *random);

/** Gaussian with mean 0 and variance 1 (polar method of Marsaglia). Thread: stream. */
MB_API double mb_random_normal(mb_random *random);

/* ---- quantities ---------------------------------------------------------------------------------------- */

/** Kinds of quantity a text may hold; a parsed value is in the unit named behind. */
typedef enum mb_unit {
    MB_UNIT_NUMBER,   /* no unit */
    MB_UNIT_HZ,       /* Hz; also kHz, MHz, GHz */
    MB_UNIT_S,        /* s; also ms, us, min, h */
    MB_UNIT_DB,       /* dB */
    MB_UNIT_DBC,      /* dBc: dB relative to the power of both sidebands */
    MB_UNIT_DBFS,     /* dBFS: dB relative to full scale */
    MB_UNIT_HZ_PER_S, /* Hz/s */
    MB_UNIT_DEGREE,   /* deg */
    MB_UNIT_PERCENT,  /* % */
    MB_UNIT_PPM,      /* ppm */
    MB_UNIT_W,        /* W; also mW, kW */
    MB_UNIT_V         /* V; also mV */
} mb_unit;

/** Base unit as text, such as "Hz"; "" for MB_UNIT_NUMBER. Thread: any. */
MB_API const char *mb_unit_text(mb_unit unit);

/**
 * Reads "137 Hz", "137Hz", "7.285 MHz", "-40 dBc", "250ms". A bare number is refused unless the unit is
 * MB_UNIT_NUMBER or the value is 0. Decimal point only, whatever the locale.
 * Returns MB_OK, or MB_ERROR_CONFIG with a sentence that names the text and the units accepted. Thread:
 * control.
 */
MB_API mb_status mb_quantity_parse(const char *text, mb_unit unit, double *value);

/** Writes a quantity the way mb_quantity_parse reads it, e.g. 7285000 -> "7.285 MHz". Thread: any. */
MB_API void mb_quantity_print(double value, mb_unit unit, char *out, size_t size);

/** 10 log10(power), -400 dB for zero or less. Thread: any. */
MB_API double mb_power_db(double power);

/** Power ratio of a level in dB. Thread: any. */
MB_API double mb_db_power(double level_db);

/** Replaces NaN and infinite samples by zero; returns how many there were. Thread: stream. */
MB_API size_t mb_scrub_f32(float *samples, size_t count);

/** The same for complex samples; a sample with one bad half becomes zero as a whole. Thread: stream. */
MB_API size_t mb_scrub_cf32(mb_cf32 *samples, size_t count);

/* ---- ring between two threads -------------------------------------------------------------------------- */

/**
 * Single-producer single-consumer ring of fixed-size items, lock-free (free-running counters compared by
 * difference, acquire/release atomics).
 */
typedef struct mb_ring mb_ring;

/** capacity: items, rounded up to a power of two. Errors: ARGUMENT, MEMORY. Thread: control. */
MB_API mb_status mb_ring_create(size_t capacity, size_t item_size, mb_ring **out);
/** Copies up to count items in; returns how many fitted. Thread: stream (one producer). */
MB_API size_t mb_ring_write(mb_ring *ring, const void *items, size_t count);
/** Copies up to count items out; returns how many there were. Thread: stream (one consumer). */
MB_API size_t mb_ring_read(mb_ring *ring, void *items, size_t count);
/** Items waiting. Thread: any. */
MB_API size_t mb_ring_fill(const mb_ring *ring);
/** Accepts NULL. Thread: control. */
MB_API void mb_ring_destroy(mb_ring *ring);

#ifdef __cplusplus
}
#endif

#endif
