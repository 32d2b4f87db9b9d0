#!/usr/bin/env python3
"""Writes files_reference.h: hashes (hashlib) and nearest integers (numpy.rint) that the files room must match.

Run: /usr/bin/python3 tests/reference/files_reference.py > tests/reference/files_reference.h
"""
import hashlib
import platform

import numpy


def line(text):
    print(text)


line("/* Made by files_reference.py: python %s hashlib, numpy %s rint. */" % (platform.python_version(), numpy.__version__))
line("#ifndef TESTS_REFERENCE_FILES_REFERENCE_H")
line("#define TESTS_REFERENCE_FILES_REFERENCE_H")
line("")
line("#include <stddef.h>")
line("#include <stdint.h>")
line("")
line("/* SHA-512 of the bytes i * 7 mod 251 for i = 0 .. length - 1. */")
line("static const struct {")
line("    size_t length;")
line("    const char *text;")
line("} reference_hashes[] = {")
for length in (0, 1, 3, 111, 112, 113, 127, 128, 129, 255, 1000):
    digest = hashlib.sha512(bytes(i * 7 % 251 for i in range(length))).hexdigest()
    line('    {%d,\n     "%s"\n     "%s"},' % (length, digest[:64], digest[64:]))
line("};")
line("")
line("/* x and the nearest integers of x * 32768, x * 128 and x * 128 + 127.5, clamped. */")
line("static const struct {")
line("    float x;")
line("    int16_t ci16;")
line("    int8_t ci8;")
line("    uint8_t cu8;")
line("} reference_integers[] = {")
for x in list(numpy.random.default_rng(3).uniform(-1.2, 1.2, 40).astype(numpy.float32)) + [numpy.float32(v) for v in (0, 1, -1, 0.5, -0.5, 1.5 / 32768, 2.5 / 32768, -1.5 / 128, 2.5 / 128)]:
    exact = numpy.float64(x)
    s16 = int(numpy.clip(numpy.rint(exact * 32768), -32768, 32767))
    s8 = int(numpy.clip(numpy.rint(exact * 128), -128, 127))
    u8 = int(numpy.clip(numpy.rint(exact * 128 + 127.5), 0, 255))
    line("    {%sF, %d, %d, %d}," % (float(x).hex(), s16, s8, u8))
line("};")
line("")
line("#endif")
