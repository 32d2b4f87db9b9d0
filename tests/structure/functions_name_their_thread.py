"""Every public function says in the comment before it from which thread it may be called (see core.h)."""

import re

import tree

TAG = re.compile(r"Thread:\s*\*?\s*(control|stream|any)\b")
COMMENT_OR_FUNCTION = re.compile(r"/\*.*?\*/|\bMB_API\b[^;]*;", re.DOTALL)

faults, checked = [], 0
for path in tree.files(".h", folders=("lib/include",)):
    text = re.sub(r"^[ \t]*#.*$", "", tree.read(path), flags=re.MULTILINE)
    comment = ""
    for match in COMMENT_OR_FUNCTION.finditer(text):
        part = match.group()
        if part.startswith("/*"):
            comment = part
            continue
        checked += 1
        if not TAG.search(comment):
            name = re.search(r"(\w+)\s*\(", part)
            faults.append(f"{path}: {name.group(1) if name else part}: no \"Thread: control, stream or any\"")
tree.finish(faults, checked)
