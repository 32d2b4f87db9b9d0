"""What the structure tests share: the files of the project, and the end of a test."""

import os
import re
import sys

ROOT = os.path.dirname(os.path.dirname(os.path.dirname(os.path.abspath(__file__))))
FOLDERS = ("lib", "apps", "tests", "cmake", "configs", "docs", ".ci")


def files(*endings, folders=FOLDERS):
    """Paths, from the root, of the project's files with one of the endings (all files if none is given)."""
    found = []
    for folder in folders:
        for path, names, entries in os.walk(os.path.join(ROOT, folder)):
            names[:] = sorted(name for name in names if name != "__pycache__")
            for entry in sorted(entries):
                if not endings or entry.endswith(endings):
                    found.append(os.path.relpath(os.path.join(path, entry), ROOT))
    return found


def read(path):
    """Text of a file, by its path from the root."""
    with open(os.path.join(ROOT, path), encoding="utf-8", errors="replace") as file:
        return file.read()


def code(text):
    """C text with comments and the insides of strings blanked; lines keep their numbers."""
    token = re.compile(r'/\*.*?\*/|//[^\n]*|"(?:\\.|[^"\\\n])*"|\'(?:\\.|[^\'\\\n])*\'', re.DOTALL)

    def blank(match):
        first = match.group()[0]
        lines = "\n" * match.group().count("\n")
        return first + first if first in "\"'" else " " + lines

    return token.sub(blank, text)


def rooms():
    """Names of the rooms, lowest first, as lib/CMakeLists.txt lists them."""
    match = re.search(r"set\(MIRRORBAND_ROOMS ([^)]*)\)", read("lib/CMakeLists.txt"))
    return match.group(1).split()


def room_of_header(name):
    """Room that public header mirrorband/NAME.h belongs to: the one of its name, else (a room may have several)
    the highest of those whose headers it includes. None if there is no such header."""
    path = f"lib/include/mirrorband/{name}.h"
    order = rooms()
    if not os.path.exists(os.path.join(ROOT, path)):
        return None
    if name in order:
        return name
    below = re.findall(r'#include "mirrorband/(\w+)\.h"', read(path))
    return max((room_of_header(other) for other in below if other != name), key=order.index, default=order[0])


def finish(faults, checked):
    """Ends the test: says every fault, or how much was looked at. Nothing looked at is a failure too."""
    for fault in faults:
        print(fault)
    print(f"{checked} looked at, {len(faults)} faults")
    sys.exit(1 if faults or checked == 0 else 0)
