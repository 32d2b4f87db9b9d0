#include "summary.h"

#include "iq.h"

FILE *app_summary_stream(const app_common *common, const char *second_output)
{
    if (common->quiet || common->json) {
        return NULL;
    }
    return app_is_pipe(common->to) || app_is_pipe(second_output) ? stderr : stdout;
}

int app_json_check(const app_program *program, const app_common *common, const char *option, const char *path)
{
    if (common->json && app_is_pipe(path)) {
        return app_usage_error(program, "--json and %s - would both write to standard output; give %s a file",
                               option, option);
    }
    return APP_CONTINUE;
}
