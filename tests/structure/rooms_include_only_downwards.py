"""A room includes public headers of itself and of rooms below it; internal headers stay in their room."""

import os
import re

import tree

ORDER = tree.rooms()
QUOTED = re.compile(r'^[ \t]*#[ \t]*include[ \t]*"([^"]+)"', re.MULTILINE)
PUBLIC = re.compile(r"^mirrorband/(\w+)\.h$")


def room_of(path):
    """Room of a source or of a public header; None for the programs."""
    parts = path.split(os.sep)
    if parts[:3] == ["lib", "include", "mirrorband"]:
        return tree.room_of_header(os.path.splitext(parts[3])[0])
    return parts[1] if parts[0] == "lib" else None


def inside(path, include):
    """Whether an internal header named by `include` lies in the room of `path` (for apps: in apps)."""
    parts = path.split(os.sep)
    top = os.path.join(*parts[:2]) if parts[0] == "lib" else parts[0]
    starts = (os.path.dirname(path), top, os.path.join(top, "common"))
    for start in starts:
        target = os.path.normpath(os.path.join(start, include))
        if os.path.exists(os.path.join(tree.ROOT, target)):
            return target.startswith(top + os.sep)
    return False


def fault_of(path, include):
    room, public = room_of(path), PUBLIC.match(include)
    if public is None:
        return None if inside(path, include) else "an internal header of another room, or none at all"
    other = tree.room_of_header(public.group(1))
    if other is None:
        return "no such public header"
    if room is not None and room not in ORDER:
        return f"room {room} is missing in lib/CMakeLists.txt"
    if room is not None and ORDER.index(other) > ORDER.index(room):
        return f"room {room} lies below room {other}"
    return None


faults, checked = [], 0
for path in tree.files(".c", ".h", folders=("lib", "apps")):
    for include in QUOTED.findall(tree.read(path)):
        checked += 1
        fault = fault_of(path, include)
        if fault is not None:
            faults.append(f'{path}: #include "{include}": {fault}')
tree.finish(faults, checked)
