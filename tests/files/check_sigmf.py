"""Holds the SigMF pairs of a folder against sigmf_schema.json, their length and their hash. Argument: the folder."""
import glob
import hashlib
import json
import os
import sys

try:
    import jsonschema
except ImportError:
    print("python3-jsonschema is not there")
    sys.exit(77)

WIDTH = {"cf32_le": 8, "ci16_le": 4, "ci8": 2, "cu8": 2}


def refuse_twice(pairs):
    names = [name for name, _ in pairs]
    assert len(names) == len(set(names)), "a name stands twice"
    return dict(pairs)


def check(path, schema):
    with open(path, encoding="utf-8") as file:
        meta = json.load(file, object_pairs_hook=refuse_twice)
    jsonschema.Draft202012Validator(schema).validate(meta)
    part = meta["global"]
    assert part["core:version"] == "1.2.5", part
    with open(path.replace(".sigmf-meta", ".sigmf-data"), "rb") as file:
        data = file.read()
    samples, odd = divmod(len(data), WIDTH[part["core:datatype"]])
    assert odd == 0 and samples > 0
    starts = [note["core:sample_start"] for note in meta["annotations"]]
    assert starts == sorted(starts), "annotations must be in order of time"
    for note in meta["annotations"]:
        assert note["core:sample_start"] + note.get("core:sample_count", 0) <= samples
        if "signal:detail" in note:
            assert {"name": "signal", "version": "1.0.0", "optional": True} in part["core:extensions"]
    if "core:sha512" in part:
        assert part["core:sha512"] == hashlib.sha512(data).hexdigest()


def main():
    with open(os.path.join(os.path.dirname(__file__), "sigmf_schema.json"), encoding="utf-8") as file:
        schema = json.load(file)
    jsonschema.Draft202012Validator.check_schema(schema)
    paths = glob.glob(os.path.join(sys.argv[1], "*.sigmf-meta"))
    assert len(paths) >= 4, paths
    for path in paths:
        check(path, schema)
    print(len(paths), "pairs hold")


main()
