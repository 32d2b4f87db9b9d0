/**
 * program.h - what the programs share: options, config, errors, exit status.
 *
 * A program describes itself in one app_program, whose table of options makes the parsing, the --help text
 * and the usage errors. app_parse reads the command line, the config file and every --set, and says all that
 * is wrong with the config at once. Everything goes to stderr as "mb-receive: sentence"; results go to
 * stdout.
 */
#ifndef APPS_COMMON_PROGRAM_H
#define APPS_COMMON_PROGRAM_H

#include <stdbool.h>
#include <stdint.h>

#include "mirrorband/config.h"
#include "mirrorband/core.h"

/** Exit status of every program. */
enum {
    APP_OK = 0,
    APP_FAILURE = 1,   /* something went wrong while working */
    APP_USAGE = 2,     /* the command line or the config is wrong */
    APP_NO_SIGNAL = 3, /* no suppressed-carrier signal was found */
    APP_CONTINUE = -1  /* app_parse: go on with the job */
};

/** Common options a program takes besides --config --set --quiet --help --version, which all take. */
enum {
    APP_FROM = 1 << 0,     /* --from ENDPOINT, needed */
    APP_TO = 1 << 1,       /* --to ENDPOINT, needed */
    APP_TO_MAYBE = 1 << 2, /* --to ENDPOINT, may be left out */
    APP_JSON = 1 << 3,     /* --json */
    APP_REPORT = 1 << 4,   /* --report FILE.html */
    APP_SEED = 1 << 5      /* --seed N */
};

/** What an option of a program's own fills. */
typedef enum app_option_kind {
    APP_FLAG,     /* bool: true when given; no argument */
    APP_TEXT,     /* const char *: the argument */
    APP_QUANTITY, /* double: a quantity in the base unit; a bare number is taken in the base unit */
    APP_WHOLE,    /* uint64_t: a whole number */
    APP_KEY       /* sets the config key, over file and --set; a bare number is taken in its base unit */
} app_option_kind;

/** One option of a program's own; to be written with named fields. */
typedef struct app_option {
    const char *name;     /* without dashes */
    const char *argument; /* as shown in --help, such as "HZ"; NULL for a flag */
    const char *meaning;  /* one line for --help */
    app_option_kind kind;
    mb_unit unit;     /* APP_QUANTITY */
    void *target;     /* as the kind says; APP_KEY: unused */
    const char *key;  /* APP_KEY: "section.key" */
    double low, high; /* APP_QUANTITY, APP_WHOLE: range; both 0 = any */
} app_option;

/** Entries that several programs share; each says in its own words what the option means there. */
#define APP_RATE_OPTION(name_, meaning_, target_, high_)                                                     \
    {                                                                                                        \
        .name = (name_), .argument = "HZ", .meaning = (meaning_), .kind = APP_QUANTITY, .unit = MB_UNIT_HZ,  \
        .target = (target_), .low = 1.0, .high = (high_)                                                     \
    }
#define APP_WORD_OPTION(name_, meaning_, target_)                                                            \
    {                                                                                                        \
        .name = (name_), .argument = "WORD", .meaning = (meaning_), .kind = APP_TEXT,                        \
        .target = (void *)(target_)                                                                          \
    }
#define APP_KEY_OPTION(name_, argument_, meaning_, key_)                                                     \
    {                                                                                                        \
        .name = (name_), .argument = (argument_), .meaning = (meaning_), .kind = APP_KEY, .key = (key_)      \
    }
#define APP_IQ_CHANNEL_OPTION(target_)                                                                       \
    {                                                                                                        \
        .name = "iq-channel", .argument = "N",                                                               \
        .meaning = "which I/Q pair of a recording with several, 1 the first", .kind = APP_WHOLE,             \
        .target = (target_), .low = 1, .high = 64                                                            \
    }

/** A program. */
typedef struct app_program {
    const char *name;    /* "mb-receive" */
    const char *summary; /* one sentence for --help */
    const char *from;    /* what --from takes, for --help, such as "IQ samples: .sigmf-meta .wav ..., or -" */
    const char *to;      /* the same for --to */
    const char *example; /* a command line for --help */
    unsigned common;     /* APP_FROM | APP_TO | ... */
    const app_option *options;
    size_t option_count;
} app_program;

/** What app_parse hands over. */
typedef struct app_common {
    const char *from;   /* NULL when not given */
    const char *to;     /* NULL when not given */
    const char *report; /* NULL when not given */
    bool json;
    bool quiet;
    bool has_seed;
    uint64_t seed;     /* 1 when not given */
    mb_config *config; /* checked; destroyed by app_finish */
} app_common;

/**
 * Reads the command line. Returns APP_CONTINUE, or the exit status to end with at once (--help, --version,
 * --set help: APP_OK; usage or config errors, already written to stderr: APP_USAGE). *common is to be handed
 * to app_finish in either case. Also installs the signal handling of signals.h.
 */
int app_parse(const app_program *program, int argc, char **argv, app_common *common);

/** Frees what app_parse made. */
void app_finish(app_common *common);

/** Writes "PROGRAM: sentence" to stderr. */
void app_error(const app_program *program, const char *format, ...) __attribute__((format(printf, 2, 3)));

/** Writes a remark of the same form unless --quiet. */
void app_note(const app_program *program, const app_common *common, const char *format, ...)
    __attribute__((format(printf, 3, 4)));

/** From now on what the library warns of is said like a remark; app_parse and app_finish call these. */
void app_log_begin(const app_program *program, const app_common *common);
void app_log_end(void);

/** Usage error: as app_error, then where help is. Returns APP_USAGE. */
int app_usage_error(const app_program *program, const char *format, ...)
    __attribute__((format(printf, 2, 3)));

/**
 * Says mb_last_fault() of a failed call and returns the exit status that goes with it: CONFIG -> APP_USAGE,
 * NO_SIGNAL -> APP_NO_SIGNAL, INTERRUPTED -> 128 + the signal's number, any other -> APP_FAILURE.
 */
int app_fail(const app_program *program, mb_status status);

#endif
