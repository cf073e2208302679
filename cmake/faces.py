#!/usr/bin/env python3
# Makes the faces that certificates are set in: a subset of Open Sans (Apache License 2.0, so the name may stay) with
# Latin, Greek and Cyrillic, without hinting and layout tables, and the list of what it covers.
# SPDX-License-Identifier: GPL-3.0-or-later
#
# Use: faces.py REGULAR.ttf BOLD.ttf SRGB.icc OUT-FOLDER
import os
import shutil
import sys

from fontTools import subset
from fontTools.ttLib import TTFont

RANGES = [
    (0x0020, 0x007E), (0x00A0, 0x024F), (0x02C6, 0x02DD), (0x0300, 0x036F), (0x0370, 0x03FF), (0x0400, 0x052F),
    (0x1E00, 0x1EFF), (0x1F00, 0x1FFF), (0x2000, 0x200A), (0x2010, 0x2027), (0x202F, 0x205E), (0x2070, 0x209F),
    (0x20A0, 0x20BF), (0x2100, 0x214F), (0x2190, 0x21FF), (0x2200, 0x22FF), (0x25A0, 0x25FF),
]
# What every certificate needs, whatever the names in it.
NEEDED = "0123456789+±×·−–—≤≥≈°%‰²³µμνρσΔ§…’‘“”№€"


def wanted():
    return {point for low, high in RANGES for point in range(low, high + 1)}


def cut(source, target):
    options = subset.Options()
    options.hinting = False
    options.layout_features = []
    options.drop_tables += ["GSUB", "GPOS", "GDEF", "kern", "DSIG", "FFTM", "meta", "gasp", "cvt ", "fpgm", "prep"]
    options.notdef_outline = True
    options.glyph_names = False
    options.legacy_kern = False
    options.name_IDs = ["*"]
    font = subset.load_font(source, options)
    subsetter = subset.Subsetter(options)
    subsetter.populate(unicodes=wanted())
    subsetter.subset(font)
    subset.save_font(font, target, options)
    return set(TTFont(target).getBestCmap())


def write_coverage(path, covered):
    points = sorted(covered)
    with open(path, "w", encoding="ascii") as out:
        out.write("# Code points that a certificate can show, one range a line.\n")
        start = previous = points[0]
        for point in points[1:] + [None]:
            if point is None or point != previous + 1:
                out.write(f"U+{start:04X}..U+{previous:04X}\n")
                start = point
            previous = point


NOTICE = """regular.ttf and bold.ttf are parts of Open Sans Regular and Open Sans Semibold, made by Steve Matteson for Ascender
Corp., Digitized data copyright Google Corporation, under the Apache License, Version 2.0
(http://www.apache.org/licenses/LICENSE-2.0). Changed: only Latin, Greek, Cyrillic and signs are kept; hinting and layout
tables are left out.
srgb.icc comes unchanged from ICC Profiles Free, under the zlib licence.
"""


def main():
    regular, bold, profile, folder = sys.argv[1:5]
    os.makedirs(folder, exist_ok=True)
    covered = cut(regular, os.path.join(folder, "regular.ttf"))
    covered &= cut(bold, os.path.join(folder, "bold.ttf"))
    missing = [character for character in NEEDED if ord(character) not in covered]
    if missing:
        sys.exit(f"faces.py: {regular} lacks {' '.join(missing)}; install fonts-open-sans")
    write_coverage(os.path.join(folder, "coverage.txt"), covered)
    with open(os.path.join(folder, "NOTICE"), "w", encoding="ascii") as out:
        out.write(NOTICE)
    shutil.copyfile(profile, os.path.join(folder, "srgb.icc"))


main()
