#include "pump.h"

#include "progress.h"
#include "signals.h"

mb_status app_pump(const app_program *program, const app_common *common, const app_pass *pass)
{
    app_progress progress =
        app_progress_begin(program, common, pass->doing, (double)pass->samples / pass->rate_hz);
    mb_status status = MB_OK;
    uint64_t done = 0;
    size_t taken = 1;

    while (status == MB_OK && taken > 0) {
        taken = 0;
        status = app_interrupted() != 0 ? MB_ERROR_INTERRUPTED : pass->step(pass->job, &taken);
        done += taken;
        app_progress_update(&progress, (double)done / pass->rate_hz);
    }
    app_progress_end(&progress);
    if (status == MB_OK && done == 0) {
        return mb_fail(MB_ERROR_FORMAT, "",
                       "the input ended before its first sample; is what feeds the pipe running?");
    }
    return status;
}
