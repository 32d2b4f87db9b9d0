#include "mirrorband/channel.h"

#include <stdio.h>
#include <string.h>

/* Two-path channels of ITU-R F.1487 (05/2000) Annex 3, by latitude and condition; the last is ours. */
static const struct preset {
    const char *name;
    double delay_s, spread_hz, second_path_db;
} presets[] = {
    {"low-quiet", 0.5e-3, 0.5, 0.0},       {"low-moderate", 2e-3, 1.5, 0.0},
    {"low-disturbed", 6e-3, 10.0, 0.0},    {"mid-quiet", 0.5e-3, 0.1, 0.0},
    {"mid-moderate", 1e-3, 0.5, 0.0},      {"mid-disturbed", 2e-3, 1.0, 0.0},
    {"mid-near-vertical", 7e-3, 1.0, 0.0}, {"high-quiet", 1e-3, 0.5, 0.0},
    {"high-moderate", 3e-3, 10.0, 0.0},    {"high-disturbed", 7e-3, 30.0, 0.0},
    {"gentle", 0.5e-3, 0.05, -12.0},
};
enum { PRESET_COUNT = sizeof presets / sizeof presets[0] };

static const struct preset *find(const char *name)
{
    for (size_t i = 0; i < PRESET_COUNT; i++) {
        if (strcmp(presets[i].name, name) == 0) {
            return &presets[i];
        }
    }
    return NULL;
}

static mb_status unknown(const char *name)
{
    char names[256] = "";
    size_t used = 0;

    for (size_t i = 0; i < PRESET_COUNT && used < sizeof names; i++) {
        int made = snprintf(names + used, sizeof names - used, "%s%s", i > 0 ? ", " : "", presets[i].name);
        used += made > 0 ? (size_t)made : 0;
    }
    return mb_fail(MB_ERROR_ARGUMENT, "fading", "there is no fading named \"%s\"; there are %s", name, names);
}

const char *mb_fading_preset_name(size_t index)
{
    return index < PRESET_COUNT ? presets[index].name : NULL;
}

mb_status mb_fading_preset(const char *name, double *delay_s, double *spread_hz)
{
    const struct preset *preset = find(name);

    if (preset == NULL) {
        return unknown(name);
    }
    if (delay_s != NULL) {
        *delay_s = preset->delay_s;
    }
    if (spread_hz != NULL) {
        *spread_hz = preset->spread_hz;
    }
    return MB_OK;
}

mb_status mb_channel_settings_fading(mb_channel_settings *settings, const char *name)
{
    const struct preset *preset = find(name);

    if (strcmp(name, "none") == 0) {
        settings->paths = 0;
        return MB_OK;
    }
    if (preset == NULL) {
        return unknown(name);
    }
    settings->paths = 2;
    settings->delay_s = preset->delay_s;
    settings->doppler_spread_hz = preset->spread_hz;
    settings->second_path_db = preset->second_path_db;
    return MB_OK;
}
