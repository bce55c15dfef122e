"""Records of a drawing as raw bytes, and what of them is ours: independent of the program under test."""

import collections
import re
import struct

APP = b"THRUSTMARK"
SENTINEL = b"AutoCAD Binary DXF\r\n\x1a\x00"


def size_of(code, two):
    """Bytes of a binary value of this group code; 0 for text, which ends in a zero, -1 for a counted chunk."""
    for low, high, size in (
        (0, 9, 0), (10, 59, 8), (60, 79, 2), (90, 99, 4), (100, 105, 0), (110, 149, 8), (160, 169, 8), (170, 179, 2),
        (210, 239, 8), (270, 289, 2), (290, 299, 1 if two else 2), (300, 309, 0), (310, 319, -1), (320, 369, 0),
        (370, 389, 2), (390, 399, 0), (400, 409, 2), (410, 419, 0), (420, 429, 4), (430, 439, 0), (440, 459, 4),
        (460, 469, 8), (470, 481, 0), (999, 1003, 0), (1004, 1004, -1), (1005, 1009, 0), (1010, 1059, 8),
        (1060, 1070, 2), (1071, 1071, 4),
    ):  # fmt: skip
        if low <= code <= high:
            return size
    raise ValueError(f"group code {code}")


def binary_tags(data):
    """Tags of a binary drawing: (code, value, start, end), up to EOF."""
    at = len(SENTINEL)
    two = data[at : at + 2] == b"\0\0"
    while at < len(data):
        start = at
        if two:
            code = struct.unpack_from("<H", data, at)[0]
            at += 2
        else:
            code = data[at]
            at += 1
            if code == 255:
                code = struct.unpack_from("<H", data, at)[0]
                at += 2
        size = size_of(code, two)
        if size == 0:
            end = data.index(b"\0", at)
            value, at = data[at:end], end + 1
        elif size == -1:
            value, at = data[at + 1 : at + 1 + data[at]], at + 1 + data[at]
        else:
            value, at = data[at : at + size], at + size
        yield code, value, start, at
        if code == 0 and value.strip() == b"EOF":
            break


def records(data):
    """Raw records of a drawing: (type, bytes), cut before every group 0; bytes before the first belong to none."""
    if data.startswith(SENTINEL):
        starts = [(start, value.strip()) for code, value, start, _ in binary_tags(data) if code == 0]
        return cut(data, starts)
    lines = data.split(b"\n")
    starts = []
    offset = 0
    start = 3 if data.startswith(b"\xef\xbb\xbf") else 0
    for i in range(0, len(lines) - 1, 2):
        code = lines[i][start if i == 0 else 0 :].strip()
        size = len(lines[i]) + len(lines[i + 1]) + 2
        if code == b"0":
            starts.append((offset, lines[i + 1].strip()))
            if lines[i + 1].strip() == b"EOF":
                break
        offset += size
    return cut(data, starts)


def cut(data, starts):
    out = []
    for (a, kind), nxt in zip(starts, starts[1:] + [(len(data), b"")]):
        out.append((kind, data[a : nxt[0]]))
    return data[: starts[0][0]] if starts else data, out


def pairs_of(raw, binary):
    """Codes and values of one record, as bytes without blanks."""
    if not binary:
        tags = [x.strip() for x in raw.split(b"\n")]
        return list(zip(tags[0::2], tags[1::2]))
    # Any record is long enough in the form of the whole: the two-byte form begins with two zeros.
    return [(str(code).encode(), value.strip()) for code, value, _, _ in binary_tags(SENTINEL + raw)]


def is_ours(kind, raw, binary):
    pairs = pairs_of(raw, binary)
    if (b"1001", APP) in pairs:
        return True
    return kind == b"APPID" and (b"2", APP) in pairs


def without_marks(data):
    head, recs = records(data)
    binary = data.startswith(SENTINEL)
    kept = [(k, r) for k, r in recs if not is_ours(k, r, binary)]
    # A table, or a section, that we made holds nothing once our records are gone.
    return head, kept


HANDLES = re.compile(rb"\n\s*(?:5|105)\s*?\n\s*[0-9A-Fa-f]+\s*?\n")
BINARY_SEED = re.compile(rb"(\$HANDSEED\0\x05\0?)[^\0]*")
SEED = re.compile(rb"(\$HANDSEED\s*?\n\s*5\s*?\n)[^\n]*")


def plain(data):
    if data.startswith(SENTINEL):
        return BINARY_SEED.sub(rb"\1?", data)
    return SEED.sub(rb"\1?", data)


def table_name(raw, binary):
    return next((v for c, v in pairs_of(raw, binary) if c == b"2"), b"")


def made_empty(kept, source, binary):
    """Drops empty tables and sections that stand in the copy and not in the source."""
    out = list(kept)
    for open_, close in ((b"TABLE", b"ENDTAB"), (b"SECTION", b"ENDSEC")):
        there = collections.Counter(table_name(r, binary) for k, r in source if k == open_)
        i = 0
        seen = collections.Counter()
        while i < len(out) - 1:
            name = table_name(out[i][1], binary)
            if out[i][0] == open_:
                seen[name] += 1
                if out[i + 1][0] == close and seen[name] > there[name]:
                    del out[i : i + 2]
                    continue
            i += 1
    return out


def partly_numbered(data):
    """Whether some records have handles and others have none, with no $HANDSEED to tell what is free."""
    if b"$HANDSEED" in data:
        return False
    binary = data.startswith(SENTINEL)
    kinds = {b"LAYER", b"LINE", b"INSERT", b"POINT", b"LWPOLYLINE", b"POLYLINE", b"TEXT", b"ARC", b"CIRCLE", b"3DFACE"}
    has = {any(c == b"5" for c, _ in pairs_of(r, binary)) for k, r in records(data)[1] if k in kinds}
    return len(has) == 2


def inserted(marked):
    """Entities among the records that carry our extended data."""
    _, recs = records(marked)
    binary = marked.startswith(SENTINEL)
    tables = {b"LAYER", b"LTYPE", b"APPID", b"STYLE", b"VERTEX", b"SEQEND"}
    return sum(1 for k, r in recs if k not in tables and is_ours(k, r, binary))


def check_bytes(source, marked):
    head_s, recs_s = records(source)
    head_m, kept = without_marks(marked)
    kept = made_empty(kept, recs_s, source.startswith(SENTINEL))
    a = plain(head_s + b"".join(r for _, r in recs_s))
    b = plain(head_m + b"".join(r for _, r in kept))
    if a != b and a + b"\n" != b and a + b"\r\n" != b:
        return "the copy differs by more than the inserted records"
    return None
