"""Every symbol that the shared library exports begins with mb_, and every public function is exported.

Argument: the shared library.
"""

import re
import subprocess
import sys

import tree

PUBLIC = re.compile(r"MB_API\b[^;(]*?\b(\w+)\s*\(")
OF_TOOLS = re.compile(r"^(_init|_fini|__asan_|__ubsan_|__odr_asan|__sanitizer_|_edata|_end|__bss_start)")

table = subprocess.run(
    ["nm", "-D", "--defined-only", "--format=posix", sys.argv[1]], check=True, capture_output=True, text=True
).stdout
exported = {line.split()[0].split("@")[0] for line in table.splitlines()}
faults = [f"{name}: exported without the prefix" for name in sorted(exported)
          if not name.startswith("mb_") and not OF_TOOLS.match(name)]

built = {path.split("/")[1] for path in tree.files(".c", folders=("lib",))}
checked = len(exported)
for path in tree.files(".h", folders=("lib/include",)):
    if tree.room_of_header(path.split("/")[-1][:-2]) not in built:
        continue  # a room that is declared and not built yet
    for name in PUBLIC.findall(tree.code(tree.read(path)).replace("#define MB_API", "")):
        if name != "__attribute__" and name not in exported:
            faults.append(f"{path}: {name} is declared and not exported")
tree.finish(faults, checked)
