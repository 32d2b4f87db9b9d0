/* Made by tests/reference/detect_reference.py (its docstring has the command)
 * with numpy 1.24.2, scipy 1.10.1. Do not edit. */
/* clang-format off */
#ifndef TESTS_REFERENCE_DETECT_H
#define TESTS_REFERENCE_DETECT_H

enum { REFERENCE_BANDPASS_LENGTH = 485 };

/* frequency in Hz, magnitude of the response */
static const double reference_bandpass[14][2] = {
    {100.0, 0.0006364850619542697},
    {150.0, 0.04776862027469072},
    {190.0, 0.49995985325699815},
    {220.0, 0.8870827783296781},
    {250.0, 0.9989889456438078},
    {300.0, 1.0003223571549005},
    {1000.0, 1.0000847388625815},
    {2000.0, 1.0000282113994339},
    {2700.0, 1.0004496872668835},
    {2750.0, 0.9990719094609047},
    {2780.0, 0.8870288686020997},
    {2810.0, 0.49997910903323434},
    {2850.0, 0.04762439256583894},
    {2900.0, 0.0007435342049692897},
};

#endif
