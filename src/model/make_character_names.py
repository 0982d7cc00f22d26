#!/usr/bin/env python3
"""Writes character_names.inc: Unicode names of the characters that turn up in transcriptions.

Run from this folder as `python3 make_character_names.py > character_names.inc`; the names are those of
Python's unicodedata (Unicode 14.0.0, the same data as Debian's unicode-data package).
"""
import unicodedata

BLOCKS = [
    (0x0020, 0x0386), (0x0386, 0x0530), (0x1AB0, 0x1AD0), (0x1D00, 0x2000), (0x2010, 0x2070), (0x2070, 0x20D0),
    (0x2190, 0x21A0), (0x25CC, 0x25CD), (0x27E8, 0x27EA), (0xA708, 0xA722), (0xA720, 0xA800), (0xAB30, 0xAB70),
]

print(f"// Made by make_character_names.py from Unicode {unicodedata.unidata_version}; do not edit.")
for first, last in BLOCKS:
    for code in range(first, last):
        name = unicodedata.name(chr(code), "")
        if name and not (0xA720 <= code < 0xA722 and first == 0xA720):
            print(f'{{0x{code:04X}, "{name}"}},')
