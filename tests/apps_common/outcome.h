/* outcome.h - runs a function in a process of its own and keeps what it wrote and how it ended. */
#ifndef TESTS_APPS_COMMON_OUTCOME_H
#define TESTS_APPS_COMMON_OUTCOME_H

#include <sys/wait.h>
#include <unistd.h>

#include "check.h"

typedef struct outcome {
    int status; /* exit status, or 1000 + the signal that ended it */
    char output[16384];
    char errors[8192];
} outcome;

static inline void outcome_read(FILE *file, char *text, size_t size)
{
    rewind(file);
    size_t length = fread(text, 1, size - 1, file);
    text[length] = '\0';
    (void)fclose(file);
}

/* The function's value is the exit status. */
static inline void outcome_of(int (*job)(void *user), void *user, outcome *result)
{
    int waited = 0;
    FILE *output = tmpfile(), *errors = tmpfile();

    assert_true(output != NULL && errors != NULL);
    (void)fflush(NULL);
    pid_t child = fork();
    assert_true(child >= 0);
    if (child == 0) {
        (void)dup2(fileno(output), STDOUT_FILENO);
        (void)dup2(fileno(errors), STDERR_FILENO);
        int status = job(user);
        (void)fflush(NULL);
        _exit(status);
    }
    assert_int_equal(waitpid(child, &waited, 0), child);
    result->status = WIFEXITED(waited) ? WEXITSTATUS(waited) : 1000 + WTERMSIG(waited);
    outcome_read(output, result->output, sizeof result->output);
    outcome_read(errors, result->errors, sizeof result->errors);
}

#endif
