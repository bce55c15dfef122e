"""Holds marked copies against two independent readers and against the source's bytes.

usage: readers.py BINARY [--shared FOLDER] [--fixtures FOLDER] [--jobs N]

For every drawing: `mark`, then
 - bytes: the copy without the records that carry our extended data is the source, but for the handle seed;
 - `unmark` gives back the source's bytes;
 - marking the marked copy again gives the same bytes;
 - ezdxf: the audit of the copy finds nothing that the audit of the source did not, and the copy holds exactly the source's
   entities and the new ones;
 - GDAL's OGR (through pyogrio): exactly the features of the source and the new ones.
Drawings: every fixture, and every drawing of the shared corpus of versions R12 to R2018 with an arch put into it. Where the
shared folder is missing that part is skipped, and said so.
"""

import argparse
import collections
import logging
import concurrent.futures
import hashlib
import importlib.util
import json
import pathlib
import re
import subprocess
import sys
import tempfile
import warnings

APP = b"THRUSTMARK"
VERSIONS = {b"AC1009", b"AC1015", b"AC1018", b"AC1021", b"AC1024", b"AC1027", b"AC1032"}


def records(data):
    """Raw records of an ASCII drawing: (type, bytes), cut before every group 0; bytes before the first belong to none."""
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
    out = []
    for (a, kind), nxt in zip(starts, starts[1:] + [(len(data), b"")]):
        out.append((kind, data[a : nxt[0]]))
    return data[: starts[0][0]] if starts else data, out


def lines_of(raw):
    return [x.strip() for x in raw.split(b"\n")]


def is_ours(kind, raw):
    tags = lines_of(raw)
    pairs = list(zip(tags[0::2], tags[1::2]))
    if (b"1001", APP) in pairs:
        return True
    return kind == b"APPID" and (b"2", APP) in pairs


def without_marks(data):
    head, recs = records(data)
    kept = [(k, r) for k, r in recs if not is_ours(k, r)]
    # A table, or a section, that we made holds nothing once our records are gone.
    return head, kept


HANDLES = re.compile(rb"\n\s*(?:5|105)\s*?\n\s*[0-9A-Fa-f]+\s*?\n")
SEED = re.compile(rb"(\$HANDSEED\s*?\n\s*5\s*?\n)[^\n]*")


def plain(data):
    return SEED.sub(rb"\1?", data)


def table_name(raw):
    tags = lines_of(raw)
    return next((v for c, v in zip(tags[0::2], tags[1::2]) if c == b"2"), b"")


def made_empty(kept, source):
    """Drops empty tables and sections that stand in the copy and not in the source."""
    out = list(kept)
    for open_, close in ((b"TABLE", b"ENDTAB"), (b"SECTION", b"ENDSEC")):
        there = collections.Counter(table_name(r) for k, r in source if k == open_)
        i = 0
        seen = collections.Counter()
        while i < len(out) - 1:
            name = table_name(out[i][1])
            if out[i][0] == open_:
                seen[name] += 1
                if out[i + 1][0] == close and seen[name] > there[name]:
                    del out[i : i + 2]
                    continue
            i += 1
    return out


def inserted(marked):
    """Entities among the records that carry our extended data."""
    _, recs = records(marked)
    tables = {b"LAYER", b"LTYPE", b"APPID", b"STYLE", b"VERTEX", b"SEQEND"}
    return sum(1 for k, r in recs if k not in tables and is_ours(k, r))


def check_bytes(source, marked):
    head_s, recs_s = records(source)
    head_m, kept = without_marks(marked)
    kept = made_empty(kept, recs_s)
    a = plain(head_s + b"".join(r for _, r in recs_s))
    b = plain(head_m + b"".join(r for _, r in kept))
    if a != b and a + b"\n" != b and a + b"\r\n" != b:
        return "the copy differs by more than the inserted records"
    return None


def audit(path):
    import ezdxf
    from ezdxf import recover

    try:
        doc = ezdxf.readfile(path)
        how = "readfile"
        auditor = doc.audit()
    except Exception:
        try:
            doc, auditor = recover.readfile(path)
            how = "recover"
        except Exception as error:
            return None, "unreadable: " + type(error).__name__
    codes = collections.Counter(e.code for e in auditor.errors) + collections.Counter(e.code for e in auditor.fixes)
    entities = 0
    ours = 0
    handles = set()
    for layout in doc.layouts:
        for entity in layout:
            if entity.has_xdata(APP.decode()):
                ours += 1
            else:
                entities += 1
                handles.add((entity.dxftype(), entity.dxf.handle))
    return (codes, entities, ours, handles), how


def features(path):
    import pyogrio

    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            return pyogrio.read_info(path, layer="entities", force_feature_count=True)["features"]
    except Exception:
        return None


def one(task):
    binary, name, data, folder = task
    problems = []
    base = pathlib.Path(folder) / name
    base.mkdir(parents=True)
    source = base / "drawing.dxf"
    source.write_bytes(data)
    job = task_job(name)
    if job:
        (base / "thrustmark.toml").write_bytes(job)
    marked = base / "drawing.thrust.dxf"
    again = base / "again.dxf"
    restored = base / "restored.dxf"
    run = subprocess.run([binary, "mark", source, "--json", "-"], capture_output=True, timeout=120)
    if run.returncode == 2:
        result = json.loads(run.stdout) if run.stdout.strip() else {"runs": []}
        error = result["runs"][0]["error"] if result["runs"] else {"check": "?", "message": run.stderr.decode(errors="replace")}
        if marked.exists():
            problems.append("refused, yet a copy stands there")
        return name, "refused", f"{error['check']}: {error['message']}", problems, None
    if run.returncode not in (0, 1, 3):
        return name, "failed", run.stderr.decode(errors="replace")[:500], [f"exit status {run.returncode}"], None
    out = marked.read_bytes()
    if source.read_bytes() != data:
        problems.append("the source was changed")
    ascii_form = not data.startswith(b"AutoCAD Binary DXF")
    if ascii_form:
        wrong = check_bytes(data, out)
        if wrong:
            problems.append(wrong)
    undo = subprocess.run([binary, "unmark", marked, "--output", restored], capture_output=True, timeout=120)
    if undo.returncode != 0:
        problems.append("unmark: " + undo.stderr.decode(errors="replace")[:300])
    elif hashlib.sha256(restored.read_bytes()).digest() != hashlib.sha256(data).digest():
        problems.append("unmark does not give back the source")
    twice = subprocess.run([binary, "mark", marked, "--output", again], capture_output=True, timeout=120)
    if twice.returncode == 2:
        problems.append("marking twice: " + twice.stderr.decode(errors="replace")[:300])
    elif again.read_bytes() != out and b"drawing.thrust.dxf" not in again.read_bytes():
        problems.append("marking twice is not marking once")
    ours = inserted(out) if ascii_form else None
    if ours == 0:
        problems.append("nothing was put in")
    before, how_before = audit(source)
    after, how_after = audit(marked)
    counts = {"ezdxf": how_before, "ours": ours or 0}
    if before is not None:
        if after is None or how_after != how_before:
            problems.append(f"ezdxf read the source by {how_before}, the copy: {how_after}")
        else:
            new = after[0] - before[0]
            if not HANDLES.search(data):
                # A drawing without a single handle: every one of its tables is complained of, and one that we made too.
                counts["no handles"] = 1
                for code in list(new):
                    if before[0][code] and code.name == "INVALID_TABLE_HANDLE":
                        del new[code]
            if new:
                problems.append(f"ezdxf's audit finds new: {dict(new)}")
            if after[1] != before[1]:
                problems.append(f"ezdxf saw {before[1]} entities, now {after[1]} beside ours")
            if ascii_form and before[1] == 0 and after[2] == 0:
                # A section without an end: ezdxf takes nothing from it, not even what the source has there.
                counts["nothing seen before or after"] = 1
            elif ascii_form and after[2] != ours:
                problems.append(f"ezdxf sees {after[2]} of our {ours} entities")
            elif after[2] == 0:
                problems.append("ezdxf sees none of our entities")
    ogr_before = features(source) if ascii_form else None
    if ogr_before is not None:
        ogr_after = features(marked)
        counts["ogr"] = True
        if ogr_after is None:
            problems.append("OGR reads the source and not the copy")
        elif ogr_after - ogr_before != ours:
            problems.append(f"OGR sees {ogr_after - ogr_before} entities more, and {ours} were put in")
    return name, "marked", "", problems, counts


def task_job(name):
    """Only the injected drawings get a job file here; fixtures use their own."""
    return JOBS.get(name)


JOBS = {}


def corpus_tasks(shared):
    spec = importlib.util.spec_from_file_location("inject", shared / "tools" / "inject.py")
    inject = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(inject)
    skipped = collections.Counter()
    for path in sorted((shared / "corpus").glob("*.dxf")):
        data = path.read_bytes()
        if data.startswith(b"AutoCAD Binary DXF"):
            skipped["binary"] += 1
            continue
        match = re.search(rb"\$ACADVER\s*\n\s*1\s*\n\s*(AC[\d.]+)", data)
        version = match.group(1) if match else None
        if version not in VERSIONS:
            skipped[(version or b"no version").decode()] += 1
            continue
        try:
            yield path.stem, inject.inject(data)
        except Exception as error:
            skipped["not injected: " + str(error)[:40]] += 1
    print("corpus drawings left out:", dict(skipped))


def main():
    logging.disable(logging.CRITICAL)
    p = argparse.ArgumentParser()
    p.add_argument("binary")
    p.add_argument("--shared", type=pathlib.Path)
    p.add_argument("--fixtures", type=pathlib.Path)
    p.add_argument("--jobs", type=int, default=2)
    a = p.parse_args()
    binary = str(pathlib.Path(a.binary).resolve())
    with tempfile.TemporaryDirectory() as folder:
        tasks = []
        if a.fixtures:
            job = (a.fixtures / "good" / "thrustmark.toml").read_bytes()
            for path in sorted((a.fixtures / "good").glob("*.dxf")):
                name = "fixture " + path.stem
                JOBS[name] = job.replace(path.name.encode(), b"drawing.dxf")
                tasks.append((binary, name, path.read_bytes(), folder))
        if a.shared and (a.shared / "corpus").is_dir():
            for name, data in corpus_tasks(a.shared):
                tasks.append((binary, name, data, folder))
        else:
            print("SKIPPED: no shared corpus here; only the fixtures are read")
        total = collections.Counter()
        bad = []
        refused = []
        with concurrent.futures.ProcessPoolExecutor(a.jobs) as pool:
            for name, state, why, problems, counts in pool.map(one, tasks, chunksize=4):
                total[state] += 1
                if state == "refused":
                    refused.append((name, why))
                for key, value in (counts or {}).items():
                    total[f"{key} {value}" if key == "ezdxf" else key] += 1 if key != "ours" else value
                bad += [(name, problem) for problem in problems]
        for name, why in refused:
            print(f"refused  {name}: {why}")
        for name, problem in bad:
            print(f"PROBLEM  {name}: {problem}")
        print("readers:", ", ".join(f"{k} {v}" for k, v in sorted(total.items())))
        print(f"{len(tasks) - len({n for n, _ in bad})} passed, {len({n for n, _ in bad})} failed")
        return 1 if bad or not total["marked"] else 0


if __name__ == "__main__":
    sys.exit(main())
