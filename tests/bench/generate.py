#!/usr/bin/env python3
"""Writes a large drawing for measurements: a demo drawing of the fixtures with many more entities put in.

Half of them are lines, a quarter polylines of eight vertices, an eighth each texts and inserts, on forty layers. The
same arguments give the same bytes.
"""

import argparse
import random
import struct
from pathlib import Path

BASE = Path(__file__).resolve().parents[2] / "fixtures" / "good" / "open-spandrel-rib.dxf"
SENTINEL = b"AutoCAD Binary DXF\r\n\x1a\0"
# Entities made before they repeat; only their handles go on.
DISTINCT = 4000


def kind(code):
    """Struct format of a binary value; None for text, "chunk" for bytes."""
    for low, high, form in [
        (10, 59, "<d"), (110, 149, "<d"), (210, 239, "<d"), (460, 469, "<d"), (1010, 1059, "<d"),
        (60, 79, "<h"), (170, 179, "<h"), (270, 289, "<h"), (370, 389, "<h"), (400, 409, "<h"), (1060, 1070, "<h"),
        (90, 99, "<i"), (420, 429, "<i"), (440, 459, "<i"), (1071, 1071, "<i"), (160, 169, "<q"), (290, 299, "<B"),
        (310, 319, "chunk"), (1004, 1004, "chunk"),
    ]:
        if low <= code <= high:
            return form
    return None


def encoder(form):
    """Tags to bytes."""
    if form != "binary":
        end = "\r\n" if form == "crlf" else "\n"
        return lambda tags: "".join(f"{code:>3}{end}{value}{end}" for code, value in tags).encode()

    def encode(tags):
        out = bytearray()
        for code, value in tags:
            out += struct.pack("<H", code)
            how = kind(code)
            if how is None:
                out += str(value).encode() + b"\0"
            elif how == "chunk":
                data = bytes.fromhex(value)
                out += bytes([len(data)]) + data
            else:
                out += struct.pack(how, float(value) if how == "<d" else int(value))
        return bytes(out)

    return encode


def base():
    lines = BASE.read_text(encoding="utf-8").splitlines()
    tags = [(int(code), value) for code, value in zip(lines[::2], lines[1::2])]
    seed = tags.index((9, "$HANDSEED")) + 1
    tags[seed] = (5, "FFFFFFFF")
    return tags


def find(tags, *run):
    """Index behind a run of tags."""
    for i in range(len(tags)):
        if tuple(tags[i : i + len(run)]) == run:
            return i + len(run)
    raise SystemExit(f"the base drawing lacks {run}")


def closing(tags, start, word):
    return tags.index((0, word), start)


def furnish(tags):
    """Forty layers and a block are put into the tables."""
    model = next(v for c, v in tags[find(tags, (2, "ENTITIES")) :] if c == 330)
    layer = find(tags, (0, "TABLE"), (2, "LAYER"))
    owner = tags[layer][1]
    zero = tags[tags.index((0, "LAYER"), layer) :]
    style = next(v for c, v in zero if c == 390)
    new = []
    for i in range(40):
        new += [
            (0, "LAYER"), (5, f"F{i:04X}"), (330, owner), (100, "AcDbSymbolTableRecord"), (100, "AcDbLayerTableRecord"),
            (2, f"PLAN-{i:02}"), (70, "0"), (62, str(i % 7 + 1)), (6, "Continuous"), (370, "-3"), (390, style),
        ]
    at = closing(tags, layer, "ENDTAB")
    tags[at:at] = new
    records = find(tags, (0, "TABLE"), (2, "BLOCK_RECORD"))
    at = closing(tags, records, "ENDTAB")
    tags[at:at] = [
        (0, "BLOCK_RECORD"), (5, "F1000"), (330, tags[records][1]), (100, "AcDbSymbolTableRecord"),
        (100, "AcDbBlockTableRecord"), (2, "TREE"), (70, "0"), (280, "1"), (281, "0"),
    ]
    at = closing(tags, find(tags, (2, "BLOCKS")), "ENDSEC")
    entity = lambda name, handle: [(0, name), (5, handle), (330, "F1000"), (100, "AcDbEntity"), (8, "0")]
    tags[at:at] = [
        *entity("BLOCK", "F1001"), (100, "AcDbBlockBegin"), (2, "TREE"), (70, "0"), (10, "0.0"), (20, "0.0"),
        (30, "0.0"), (3, "TREE"), (1, ""),
        *entity("LINE", "F1002"), (100, "AcDbLine"), (10, "0.0"), (20, "0.0"), (30, "0.0"), (11, "0.0"), (21, "1.0"),
        (31, "0.0"),
        *entity("ENDBLK", "F1003"), (100, "AcDbBlockEnd"),
    ]
    return model


def entity(number, owner, rng, only=None):
    """Type, and the tags behind its handle."""
    real = lambda code: (code, f"{rng.uniform(100, 100000):.12f}")
    what = only or ["LINE", "LINE", "LINE", "LINE", "LWPOLYLINE", "LWPOLYLINE", "TEXT", "INSERT"][number % 8]
    tags = [(330, owner), (100, "AcDbEntity"), (8, f"PLAN-{rng.randrange(40):02}")]
    if what == "LINE":
        tags += [(100, "AcDbLine"), real(10), real(20), (30, "0.0"), real(11), real(21), (31, "0.0")]
    elif what == "LWPOLYLINE":
        tags += [(100, "AcDbPolyline"), (90, "8"), (70, "0"), (43, "0.0")]
        for _ in range(8):
            tags += [real(10), real(20)]
    elif what == "TEXT":
        tags += [(100, "AcDbText"), real(10), real(20), (30, "0.0"), (40, "2.5"), (1, "some text"), (100, "AcDbText")]
    else:
        tags += [(100, "AcDbBlockReference"), (2, "TREE"), real(10), real(20), (30, "0.0")]
    return what, tags


def arches(tags, model, spans, loads):
    """In place of the arch of the base: spans in a row, each with loads at even distances."""
    start = find(tags, (2, "ENTITIES"))
    end = closing(tags, start, "ENDSEC")
    kept = []
    record = []
    for tag in [*tags[start:end], (0, "")]:
        if tag[0] == 0:
            if record and not {(8, "ARCH-AXIS"), (8, "ARCH-LOADS")} & set(record):
                kept += record
            record = []
        record.append(tag)
    handle = 0x200000
    def put(what, layer, marker, body):
        nonlocal handle
        handle += 1
        kept.extend([(0, what), (5, f"{handle:X}"), (330, model), (100, "AcDbEntity"), (8, layer), (100, marker), *body])
    height = lambda x: 9.0 * (1 - (x / 18.0 - 1) ** 2)
    for span in range(spans):
        left = 40.0 * span
        points = [(2.0 * i, height(2.0 * i)) for i in range(19)]
        put("LWPOLYLINE", "ARCH-AXIS", "AcDbPolyline", [(90, "19"), (70, "0")] + [
            tag for x, y in points for tag in ((10, repr(left + x)), (20, repr(y)))
        ])
        for i in range(1, loads + 1):
            x = 36.0 * i / (loads + 1)
            name = f"S{span}P{i} = 5 kN"
            put("POINT", "ARCH-LOADS", "AcDbPoint", [(10, repr(left + x)), (20, repr(height(x))), (30, "0.0")])
            put("TEXT", "ARCH-LOADS", "AcDbText", [
                (10, repr(left + x)), (20, repr(height(x) + 0.01)), (30, "0.0"), (40, "0.01"), (1, name), (100, "AcDbText"),
            ])
    tags[start:end] = kept


def main():
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("output", type=Path)
    parser.add_argument("--bytes", type=int, default=0, help="stop at this size, as an ASCII drawing with LF")
    parser.add_argument("--entities", type=int, default=0, help="or at this number of entities put in")
    parser.add_argument("--form", choices=["lf", "crlf", "binary"], default="lf")
    parser.add_argument("--only", choices=["LINE", "LWPOLYLINE", "TEXT", "INSERT"], help="only entities of this type")
    parser.add_argument("--spans", type=int, default=0, help="as many arches in a row in place of the demo's")
    parser.add_argument("--loads", type=int, default=7, help="loads on each of them")
    options = parser.parse_args()

    tags = base()
    model = furnish(tags)
    if options.spans:
        arches(tags, model, options.spans, options.loads)
    encode = encoder(options.form)
    text = encoder("lf")
    start = find(tags, (2, "ENTITIES"))
    at = closing(tags, start, "ENDSEC")
    rng = random.Random(1)
    made = []
    for i in range(DISTINCT):
        what, body = entity(i, model, rng, options.only)
        head = encode([(0, what)])
        handle = [(5, f"{0x1000000 + i:X}")]
        made.append((head, encode(body), len(text([(0, what), *handle, *body]))))
    size = len(text(tags))
    with options.output.open("wb") as out:
        if options.form == "binary":
            out.write(SENTINEL)
        out.write(encode(tags[:at]))
        number = 0
        pieces = []
        while size < options.bytes or number < options.entities:
            head, body, length = made[number % DISTINCT]
            if options.form == "binary":
                own = b"\x05\x00%X\x00" % (0x1000000 + number)
            elif options.form == "crlf":
                own = b"  5\r\n%X\r\n" % (0x1000000 + number)
            else:
                own = b"  5\n%X\n" % (0x1000000 + number)
            pieces += [head, own, body]
            size += length
            number += 1
            if len(pieces) > 100_000:
                out.write(b"".join(pieces))
                pieces.clear()
        out.write(b"".join(pieces))
        out.write(encode(tags[at:]))


if __name__ == "__main__":
    main()
