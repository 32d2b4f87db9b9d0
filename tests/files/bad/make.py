#!/usr/bin/env python3
"""Makes the bad inputs of this folder that are not plain text. Run in this folder; python 3.11, soundfile 0.12.1."""
import json
import os
import struct

import numpy
import soundfile


def put(name, content):
    with open(name, "wb") as file:
        file.write(content)


def wave(frames, channels=2, stated=None, tag=1, bits=16):
    data = b"\1\0" * (frames * channels)
    size = len(data) if stated is None else stated
    fmt = struct.pack("<HHIIHH", tag, channels, 8000, 8000 * channels * bits // 8, channels * bits // 8, bits)
    return b"RIFF" + struct.pack("<I", 36 + size) + b"WAVEfmt " + struct.pack("<I", 16) + fmt + b"data" + struct.pack("<I", size) + data


def sigmf(name, change=None, data=b"\1\0\2\0" * 4, **extra):
    meta = {"global": {"core:datatype": "ci16_le", "core:version": "1.2.5", "core:sample_rate": 8000}, "captures": [{"core:sample_start": 0}], "annotations": []}
    if change:
        change(meta)
    put(name + ".sigmf-meta", (json.dumps(meta, indent=1) + "\n").encode())
    if data is not None:
        put(name + ".sigmf-data", data)


def in_global(**items):
    def change(meta):
        for key, value in items.items():
            meta["global"]["core:" + key] = value
            if value is None:
                del meta["global"]["core:" + key]
    return change


put("empty.ci16", b"")
put("empty.wav", b"")
put("empty.csv", b"")
put("odd.cf32", b"\0" * 13)
put("odd.ci16", b"\0" * 7)
put("good.cf32", b"\0" * 16)
put("good.mp3", b"\0" * 16)
put("packed.sigmf", b"\0" * 16)
put("wave.cf32", wave(4))
put("wide.ci16", b"RF64\xff\xff\xff\xffWAVEds64" + b"\0" * 28)
put("flac.ci8", b"fLaC" + b"\0" * 12)
put("flac.wav", b"fLaC" + b"\0" * 12)
put("noise.wav", bytes(range(128, 192)))
put("truncated.wav", wave(4, stated=4000))
put("cut_header.wav", wave(4)[:30])
put("no_samples.wav", wave(0))
put("mono.wav", wave(4, channels=1))
put("stereo.wav", wave(4))
put("strange.wav", wave(4, tag=0x1234))
put("wave.flac", wave(4))
tone = numpy.sin(numpy.arange(20000) * 0.1) * 0.5 + numpy.random.default_rng(1).normal(0, 0.1, 20000)
soundfile.write("whole.flac", tone, 8000)
put("truncated.flac", open("whole.flac", "rb").read()[:16000])
os.remove("whole.flac")

sigmf("odd", data=b"\1\0\2\0\3\0")
sigmf("empty_data", data=b"")
sigmf("no_data", data=None)
put("no_meta.sigmf-data", b"\1\0\2\0")
put("empty.sigmf-meta", b"")
sigmf("datatype", in_global(datatype="rf32_le"))
sigmf("no_datatype", in_global(datatype=None))
sigmf("no_version", in_global(version=None))
sigmf("version", in_global(version="2.0.0"))
sigmf("bad_version", in_global(version="new"))
sigmf("rate_zero", in_global(sample_rate=0))
sigmf("rate_text", in_global(sample_rate="8000"))
sigmf("no_rate", in_global(sample_rate=None))
sigmf("channels", in_global(num_channels=0))
sigmf("hash", in_global(sha512="0" * 128))
sigmf("short_hash", in_global(sha512="12ab"))
sigmf("dataset", in_global(dataset="samples.bin"))
sigmf("metadata_only", in_global(metadata_only=True))
sigmf("start", lambda meta: meta["captures"][0].update({"core:sample_start": -1}))
sigmf("no_start", lambda meta: meta["captures"][0].clear())
sigmf("order", lambda meta: meta["captures"].insert(0, {"core:sample_start": 3}))
sigmf("frequency", lambda meta: meta["captures"][0].update({"core:frequency": 1e13}))
sigmf("header_bytes", lambda meta: meta["captures"][0].update({"core:header_bytes": 16}))
sigmf("late_capture", lambda meta: meta["captures"].append({"core:sample_start": 9}))
sigmf("truncated", lambda meta: meta["annotations"].append({"core:sample_start": 0, "core:sample_count": 100}))
sigmf("one_edge", lambda meta: meta["annotations"].append({"core:sample_start": 0, "core:freq_lower_edge": 100}))
sigmf("label", lambda meta: meta["annotations"].append({"core:sample_start": 0, "core:label": 5}))
sigmf("no_list", lambda meta: meta.pop("captures"))
put("duplicate.sigmf-meta", b'{"global": {}, "captures": [],\n "captures": []}\n')
put("damaged.sigmf-meta", b'{\n  "global": {\n    "core:datatype": "ci16_le"\n    "core:version": "1.2.5"\n  }\n}\n')
put("zero.csv", b"time_s,offset_hz\n0,\0\n")
put("long.csv", b"time_s,offset_hz\n" + b"1" * 9000 + b"\n")
put("many.csv", ",".join(f"c{i}" for i in range(65)).encode() + b"\n")
