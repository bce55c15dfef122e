"""The drawings that the readers look at: fixtures, the shared corpus with an arch in each, and drawings made by ezdxf.

Each is (group, name, bytes, job), the job being the text of a job file or None.
"""

import importlib.util
import io
import re

SENTINEL = b"AutoCAD Binary DXF\r\n\x1a\x00"
# Words of the trade in the letters of each code page: name of the page in the drawing, codec, layer of the axis.
PAGES = [
    ("ANSI_874", "cp874", "แกน โค้ง"),
    ("ANSI_932", "cp932", "橋 表軸"),
    ("ANSI_936", "gbk", "拱轴 线"),
    ("ANSI_949", "cp949", "아치 축"),
    ("ANSI_950", "cp950", "拱軸 功"),
    ("ANSI_1250", "cp1250", "Oś łuku"),
    ("ANSI_1251", "cp1251", "Ось арки"),
    ("ANSI_1252", "cp1252", "Brücke Bogenachse"),
    ("ANSI_1253", "cp1253", "Άξονας τόξου"),
    ("ANSI_1254", "cp1254", "Kemer ekseni ığş"),
    ("ANSI_1255", "cp1255", "ציר הקשת"),
    ("ANSI_1256", "cp1256", "محور القوس"),
    ("ANSI_1257", "cp1257", "Arkos ašis ėų"),
    ("ANSI_1258", "cp1258", "Đường ăâơư"),
]
DOS_PAGES = [("dos437", "cp437", "Bögen"), ("dos850", "cp850", "Bögen Ø"), ("dos852", "cp852", "Oś łuku"),
             ("dos866", "cp866", "Ось арки"), ("dos861", "cp861", "Bogi þ"), ("dos737", "cp737", "άξονας")]  # fmt: skip
VERSIONS = ["R12", "R2000", "R2004", "R2007", "R2010", "R2013", "R2018"]
LOADS = "Loads é"


def fixtures(folder):
    for name in ("good", "drawn"):
        job = (folder / name / "thrustmark.toml").read_text()
        for path in sorted((folder / name).glob("*.dxf")):
            yield "fixtures", path.stem, path.read_bytes(), job.replace(path.name, "drawing.dxf")


def corpus(shared):
    """Every drawing of the corpus that can take an arch; the others are given back with the reason."""
    spec = importlib.util.spec_from_file_location("inject", shared / "tools" / "inject.py")
    inject = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(inject)
    taken, left = [], []
    for path in sorted((shared / "corpus").glob("*.dxf")):
        try:
            taken.append(("corpus", path.stem, inject.inject(path.read_bytes()), None))
        except Exception as error:
            left.append((path.stem, path.read_bytes(), str(error) or type(error).__name__))
    return taken, left


def job(axis, loads):
    return f'[layers]\naxis = "{axis}"\nloads = "{loads}"\n'


def arch(doc, axis, loads):
    """A parabola of span 40 and rise 8 with seven loads."""
    msp = doc.modelspace()
    height = lambda x: 32.0 * x * (40.0 - x) / 1600.0
    points = [(1.25 * i, height(1.25 * i)) for i in range(33)]
    doc.layers.add(axis)
    doc.layers.add(loads)
    msp.add_polyline2d(points, dxfattribs={"layer": axis})
    for i in range(1, 8):
        x = 5.0 * i
        msp.add_point((x, height(x)), dxfattribs={"layer": loads})
        msp.add_text("120 kN", height=0.25, dxfattribs={"layer": loads, "insert": (x + 0.1, height(x) + 0.4)})


def written(doc, form):
    if form == "binary":
        stream = io.BytesIO()
        doc.write(stream, fmt="bin")
        return stream.getvalue()
    stream = io.StringIO(newline="\r\n" if form == "CR LF" else "\n")
    doc.write(stream)
    return stream.getvalue().encode(doc.output_encoding, "dxfreplace")


def generated():
    """Drawings in all versions, both forms and all code pages."""
    import ezdxf
    from ezdxf.lldxf.encoding import dxf_backslash_replace  # noqa: F401  registers the error handler

    for version in VERSIONS:
        pages = PAGES if version < "R2007" and version[1] == "2" or version in ("R12", "R2000", "R2004") else PAGES[:3]
        for page, codec, axis in pages:
            for form in ("LF", "CR LF", "binary"):
                if form == "CR LF" and page != "ANSI_1252":
                    continue
                doc = ezdxf.new(version)
                doc.encoding = codec
                loads = "Loads" if page != "ANSI_1252" else LOADS
                arch(doc, axis, loads)
                name = f"{version} {page} {form}"
                yield "generated", name, written(doc, form), job(axis, loads)
    # The pages of DOS, which ezdxf does not write: the same drawing with other bytes.
    for page, codec, axis in DOS_PAGES:
        doc = ezdxf.new("R12")
        arch(doc, "AXIS-BYTES", "Loads")
        data = written(doc, "LF")
        data = data.replace(b"AXIS-BYTES", axis.encode(codec))
        data = re.sub(rb"(\$DWGCODEPAGE\n\s*3\n)[^\n]*", rb"\1" + page.encode(), data)
        yield "generated", f"R12 {page} LF", data, job(axis, "Loads")
    # Names written with escapes, and blanks; a caret is written with a blank behind it.
    for name, layer, bytes_ in (
        ("unicode escapes", "橋軸", b"\\U+6A4B\\U+8EF8"),
        ("escapes of five pages", "橋軸", b"\\M+18BB4\\M+18EB2"),
        ("carets", "AXIS^1 A", b"AXIS^ 1 A"),
    ):
        for version in ("R12", "R2000", "R2018"):
            doc = ezdxf.new(version)
            arch(doc, "AXIS-BYTES", "Loads")
            data = written(doc, "LF").replace(b"AXIS-BYTES", bytes_)
            yield "generated", f"{version} {name}", data, job(layer, "Loads")
