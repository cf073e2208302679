#!/usr/bin/env python3
# Takes the pages of a certificate as a C table, so that floor_pages.c can let libharu set the same ones. Runs before
# anything is timed.
# SPDX-License-Identifier: GPL-3.0-or-later
#
# Use: main_job_record.py CERTIFICATE.pdf > pages.inc       (needs qpdf)
#
# Every operator of the content streams is taken over one by one, in its order: nothing is merged or left out. The
# codes of a text become its characters again through the font's ToUnicode map.
import re
import subprocess
import sys

# Operator of the content stream -> (name in the table, numbers it takes)
OPERATORS = {
    "BT": ("BEGIN_TEXT", 0), "ET": ("END_TEXT", 0), "Tf": ("FACE", 2), "Td": ("TEXT_AT", 2), "Tj": ("SHOW", 0),
    "g": ("FILL_GREY", 1), "G": ("STROKE_GREY", 1), "w": ("WIDTH", 1), "m": ("MOVE", 2), "l": ("LINE", 2),
    "S": ("STROKE", 0), "s": ("CLOSE_STROKE", 0), "f": ("FILL", 0), "b": ("CLOSE_FILL_STROKE", 0), "q": ("SAVE", 0),
    "Q": ("RESTORE", 0), "W": ("CLIP", 0), "n": ("END_PATH", 0),
}


def objects_of(pdf):
    plain = subprocess.run(["qpdf", "--qdf", "--object-streams=disable", pdf, "-"], check=True, capture_output=True)
    return {int(number): body for number, body in
            re.findall(rb"\n(\d+) 0 obj\n(.*?)\nendobj\n", plain.stdout, re.S)}


def reference(body, key):
    return int(re.search(rb"/" + key + rb" (?:\[\s*)?(\d+) 0 R", body).group(1))


def stream_of(body):
    return re.search(rb"\nstream\n(.*)\nendstream", body, re.S).group(1).decode("ascii")


def characters_of(objects, font):
    """Code -> character, from the ToUnicode map of a font."""
    text = stream_of(objects[reference(objects[font], b"ToUnicode")])
    table = {}
    for block in re.findall(r"beginbfchar\n(.*?)endbfchar", text, re.S):
        for code, point in re.findall(r"<(\w+)> <(\w+)>", block):
            table[int(code, 16)] = chr(int(point, 16))
    return table


def c_string(text):
    return '"' + "".join(c if " " <= c <= "~" and c not in '"\\?' else "".join(f"\\{b:03o}" for b in c.encode())
                         for c in text) + '"'


def emit_page(content, fonts, counts):
    print("\t{PAGE, {0, 0}, NULL},")
    operands, face = [], None
    for token in re.findall(r"<[0-9A-Fa-f]*>|\S+", content):
        if token not in OPERATORS:
            operands.append(token)
            continue
        name, numbers = OPERATORS[token]
        text = "NULL"
        values = ["0", "0"]
        if token == "Tf":
            face = operands[0][1:]
            values = [str(int(face[1:]) - 1), operands[1]]
        elif token == "Tj":
            codes = operands[0][1:-1]
            text = c_string("".join(fonts[face][int(codes[i:i + 4], 16)] for i in range(0, len(codes), 4)))
        elif len(operands) != numbers:
            sys.exit(f"{token} with {operands}")
        else:
            values[:numbers] = operands
        print(f"\t{{{name}, {{{values[0]}, {values[1]}}}, {text}}},")
        counts[token] = counts.get(token, 0) + 1
        operands = []
    if operands:
        sys.exit(f"left over: {operands}")


def main():
    objects = objects_of(sys.argv[1])
    root = next(body for body in objects.values() if b"/Type /Catalog" in body)
    kids = re.search(rb"/Kids \[(.*?)\]", objects[reference(root, b"Pages")], re.S).group(1)
    counts = {}
    pages = [int(number) for number in re.findall(rb"(\d+) 0 R", kids)]
    for page in pages:
        body = objects[page]
        fonts = {name.decode(): characters_of(objects, int(number)) for name, number in
                 re.findall(rb"/(F\d) (\d+) 0 R", body)}
        emit_page(stream_of(objects[reference(body, b"Contents")]), fonts, counts)
    print(f"{len(pages)} pages, {counts.get('Tj', 0)} texts, {counts.get('m', 0)} paths", file=sys.stderr)


main()
