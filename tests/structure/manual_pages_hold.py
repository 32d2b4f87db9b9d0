"""Manual pages are sound, and each program's page has exactly the options that its --help shows.

Arguments: the programs that are built.
"""

import os
import re
import subprocess
import sys

import tree

SHOWN = re.compile(r"^  --([\w-]+)(?: ([\w.=]+))?", re.MULTILINE)
DESCRIBED = re.compile(r"^\.TP\n\.(?:B|BI|BR|IR) (?:\\f\w)?\"?\\-\\-([\w\\-]+)", re.MULTILINE)


def sound(path):
    """Complaints of the formatter about a page."""
    done = subprocess.run(["groff", "-man", "-ww", "-z", "-Tutf8", os.path.join(tree.ROOT, path)],
                          capture_output=True, text=True)
    return [f"{path}: {line}" for line in done.stderr.splitlines()]


def options_held(program):
    """Differences between --help and the page of a program."""
    name = os.path.basename(program)
    path = f"docs/man/{name}.1"
    if not os.path.exists(os.path.join(tree.ROOT, path)):
        return [f"{path}: missing"]
    shown = subprocess.run([program, "--help"], check=True, capture_output=True, text=True).stdout
    in_help = {match[0] for match in SHOWN.findall(shown)}
    in_page = {option.replace("\\", "") for option in DESCRIBED.findall(tree.read(path))}
    return ([f"{path}: --{option} of --help is missing" for option in sorted(in_help - in_page)]
            + [f"{path}: --{option} is not in --help" for option in sorted(in_page - in_help)])


faults, checked = [], 0
for page in tree.files(".1", ".5", folders=("docs/man",)):
    checked += 1
    faults += sound(page)
for built in sys.argv[1:]:
    checked += 1
    faults += options_held(built)
tree.finish(faults, checked)
