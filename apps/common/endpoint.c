#include "endpoint.h"

#include <string.h>

#include "mirrorband/files.h"

int app_endpoint_check(const app_program *program, const char *option, const char *text)
{
    if (text == NULL) {
        return APP_CONTINUE;
    }
    if (text[0] == '\0') {
        return app_usage_error(program, "%s is empty; give a file name, or - for a pipe", option);
    }
    switch (mb_endpoint_kind(text)) {
    case MB_ENDPOINT_SOUND_DEVICE:
        return app_usage_error(program,
                               "%s %s: sound devices come with a later version; give a file, or - for a pipe",
                               option, text);
    case MB_ENDPOINT_RADIO:
        return app_usage_error(
            program, "%s %s: radios come with a later version; give a file, or - for a pipe", option, text);
    default:
        return APP_CONTINUE;
    }
}

static int check_pair(const app_program *program, const app_file *a, const app_file *b)
{
    const app_file *output = b->output ? b : a, *other = b->output ? a : b;
    bool same_pipe = a->output == b->output && strcmp(a->path, "-") == 0 && strcmp(b->path, "-") == 0;

    if (same_pipe) {
        return app_usage_error(program, "%s and %s are both -; standard %s can serve only one", a->option,
                               b->option, a->output ? "output" : "input");
    }
    if (output->output && mb_files_same(a->path, b->path)) {
        return app_usage_error(program, "%s and %s are the same file %s; give the output another name",
                               other->option, output->option, output->path);
    }
    return APP_CONTINUE;
}

int app_files_check(const app_program *program, const app_file *files, size_t count)
{
    for (size_t i = 0; i < count; i++) {
        if (files[i].path != NULL && files[i].path[0] == '\0') {
            return app_usage_error(program, "%s is empty; give a file name", files[i].option);
        }
        for (size_t j = 0; j < i; j++) {
            int status = files[i].path == NULL || files[j].path == NULL
                             ? APP_CONTINUE
                             : check_pair(program, &files[j], &files[i]);
            if (status != APP_CONTINUE) {
                return status;
            }
        }
    }
    return APP_CONTINUE;
}
