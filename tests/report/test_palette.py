"""The page's colours: contrast, and whether they stay apart for eyes that lack one kind of cone and in grey.

Outside: contrast as defined by WCAG 2.1 (relative luminance, sRGB of IEC 61966-2-1); colour vision by the matrices for severity 1.0 of
Machado, Oliveira & Fernandes 2009, IEEE TVCG 15, 1291, table 1 (figures from memory); distances in OKLab (Ottosson 2020).
Thresholds: WCAG asks 4.5 for text and 3 for graphics. Distance 0.1 in OKLab is about five steps that are just seen (0.02); surveys
also differ in shape.
"""
import os
import re
import sys

CSS = os.path.join(os.environ.get("THIRDRUNG_SOURCE_DIR", os.path.join(os.path.dirname(os.path.abspath(__file__)), "..", "..")), "src/report/page/page.css")
EYES = {
    "full": [[1, 0, 0], [0, 1, 0], [0, 0, 1]],
    "no red cones": [[0.152286, 1.052583, -0.204868], [0.114503, 0.786281, 0.099216], [-0.003882, -0.048116, 1.051998]],
    "no green cones": [[0.367322, 0.860646, -0.227968], [0.280085, 0.672501, 0.047413], [-0.011820, 0.042940, 0.968881]],
    "no blue cones": [[1.255528, -0.076749, -0.178779], [-0.078411, 0.930809, 0.147602], [0.004733, 0.691367, 0.303900]],
}


def linear(colour):
    parts = [int(colour[k:k + 2], 16) / 255 for k in (1, 3, 5)]
    return [c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in parts]


def times(matrix, vector):
    return [sum(a * b for a, b in zip(row, vector)) for row in matrix]


def luminance(colour):
    return sum(a * b for a, b in zip((0.2126, 0.7152, 0.0722), linear(colour)))


def contrast(a, b):
    bright, dark = sorted((luminance(a), luminance(b)), reverse=True)
    return (bright + 0.05) / (dark + 0.05)


def oklab(rgb):
    lms = times([[0.4122214708, 0.5363325363, 0.0514459929], [0.2119034982, 0.6806995451, 0.1073969566], [0.0883024619, 0.2817188376, 0.6299787005]], rgb)
    return times([[0.2104542553, 0.7936177850, -0.0040720468], [1.9779984951, -2.4285922050, 0.4505937099], [0.0259040371, 0.7827717662, -0.8086757660]],
                 [max(0.0, c) ** (1 / 3) for c in lms])


def distance(a, b, eye):
    seen = [oklab([min(1, max(0, c)) for c in times(EYES[eye], linear(colour))]) for colour in (a, b)]
    return sum((x - y) ** 2 for x, y in zip(*seen)) ** 0.5


def check(condition, text):
    if not condition:
        raise AssertionError(text)
    print("ok   " + text)


def main():
    blocks = re.findall(r":root[^{]*\{([^}]*)\}", open(CSS, encoding="utf-8").read())
    themes = [dict(re.findall(r"--([a-z0-9]+): (#[0-9a-f]{6})", block)) for block in blocks]
    check(len(themes) == 3 and themes[1] == themes[2], "the dark set is the same by wish of the system and by button")
    for name, theme in zip(("light", "dark"), themes):
        for word, ground in (("ink", "paper"), ("muted", "paper"), ("accent", "paper"), ("alarm", "paper"), ("ink", "panel"), ("muted", "panel"), ("ink", "low"), ("ink", "middle"), ("ink", "high")):
            value = contrast(theme[word], theme[ground])
            check(value >= 4.5, "%s: text %s on %s has contrast %.1f" % (name, word, ground, value))
        for k in range(8):
            value = contrast(theme["c%d" % k], theme["paper"])
            check(value >= 3, "%s: colour %d on paper has contrast %.1f" % (name, k, value))
        for eye in EYES:
            value, a, b = min((distance(theme["c%d" % a], theme["c%d" % b], eye), a, b) for a in range(8) for b in range(a))
            check(value > 0.1, "%s, %s: nearest two of eight are %d and %d, %.3f apart" % (name, eye, b, a, value))
            value = distance(theme["bar"], theme["alarm"], eye)
            check(value > 0.1, "%s, %s: bar and alarm %.3f apart" % (name, eye, value))
            value = distance(theme["low"], theme["high"], eye)
            check(value > 0.1, "%s, %s: the two ends of the diverging scale %.3f apart" % (name, eye, value))
    print("all passed")
    return 0


if __name__ == "__main__":
    sys.exit(main())
