"""Holds the SVG pictures of a folder against: well-formed, texts inside the page and clear of each other, no number
that is not finite, light and dark colours, size. Argument: the folder."""
import glob
import os
import re
import sys
import xml.etree.ElementTree as tree

NAME = "{http://www.w3.org/2000/svg}"
SIZE = {"h1": 19, "h2": 13, "h3": 14}


def length(text, size, bold):
    """Width of a text as DejaVu Sans, the widest of the usual fonts, has it; rounded per kind of character."""
    ems = sum(0.32 if c in " ijl.,:;'|!" else 0.40 if c in "tfr()[]I-\"" else 0.62 for c in text)
    return ems * size * (1.1 if bold else 1.0)


def box(element):
    kind = element.get("class", "")
    size = SIZE.get(kind, 12)
    width, height = length(element.text, size, kind in ("h1", "h3")), 0.75 * size
    turned = re.match(r"translate\(([-0-9.]+) ([-0-9.]+)\) rotate\(-90\)", element.get("transform", ""))
    if turned:
        x, y = map(float, turned.groups())
        return x - height, y - width / 2, x + 1, y + width / 2
    x, y = float(element.get("x")), float(element.get("y"))
    left = x - {"end": 1.0, "mid": 0.5}.get(kind, 0.0) * width
    return left, y - height, left + width, y + 1


def overlap(a, b):
    return a[0] < b[2] and b[0] < a[2] and a[1] < b[3] and b[1] < a[3]


def check(path):
    with open(path, encoding="utf-8") as file:
        text = file.read()
    root = tree.fromstring(text)
    width, height = float(root.get("width")), float(root.get("height"))
    body = re.sub(r"<(style|title|text)[^>]*>.*?</\1>", "", text, flags=re.S)
    assert not re.search(r"nan|inf", body), path
    assert "prefers-color-scheme:dark" in text and root.find(NAME + "title").text
    texts = [(element.text, box(element)) for element in root.iter(NAME + "text")]
    assert texts, path
    for i, (words, place) in enumerate(texts):
        assert place[0] >= 0 and place[1] >= 0 and place[2] <= width and place[3] <= height, (path, words, place)
        for other, where in texts[:i]:
            assert not overlap(place, where), (path, words, place, other, where)


def main():
    paths = glob.glob(os.path.join(sys.argv[1], "*.svg"))
    assert len(paths) >= 4, paths
    for path in paths:
        check(path)
    print(len(paths), "pictures hold")


main()
