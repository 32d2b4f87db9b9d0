"""The library writes to no stream of the process and never ends it: no print, no abort, no exit, no assert."""

import re

import tree

FORBIDDEN = re.compile(
    r"\b(printf|vprintf|puts|putchar|perror|psignal|abort|exit|_exit|_Exit|quick_exit|assert|stderr|system|popen)\b"
    r"(?=\s*[(,;)])"
)
STANDARD_OUTPUT = re.compile(r"\bstdout\b")  # the files room writes pipes to it when asked for "-"

faults, checked = [], 0
for path in tree.files(".c", ".h", folders=("lib",)):
    checked += 1
    for number, line in enumerate(tree.code(tree.read(path)).splitlines(), 1):
        if "__attribute__((format(" in line.replace(" ", ""):
            continue
        for word in FORBIDDEN.findall(line):
            faults.append(f"{path}:{number}: {word}")
        if STANDARD_OUTPUT.search(line) and not path.startswith("lib/files/"):
            faults.append(f"{path}:{number}: stdout")
tree.finish(faults, checked)
