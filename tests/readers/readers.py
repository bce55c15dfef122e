"""Holds marked copies against three independent readers and against the source's bytes.

usage: readers.py BINARY [--shared FOLDER] [--fixtures FOLDER] [--modules FOLDER] [--table FILE] [--jobs N]

For every drawing: `mark`, then
 - bytes: the copy without the records that carry our extended data is the source, but for the handle seed;
 - `unmark` gives back the source's bytes;
 - marking the marked copy again gives the same bytes;
 - ezdxf: the audit of the copy finds nothing that the audit of the source did not, and the copy holds exactly the source's
   entities and the new ones;
 - GDAL's OGR (through pyogrio) and the `dxf-parser` package for Node, ASCII drawings: exactly the features of the source and
   the new ones.
Drawings: every fixture, every drawing of the shared corpus with an arch put into it, and drawings made by ezdxf in all
versions, forms and code pages. Drawings below AC1009 must be checked, and their marking refused. Where the shared folder is
missing that part is skipped, and said so. `--table` writes the counts (docs/readers.md); the corpus must be there for it.
"""

import argparse
import collections
import concurrent.futures
import hashlib
import json
import logging
import pathlib
import re
import subprocess
import sys
import tempfile
import warnings

import drawings
from raw import APP, HANDLES, SENTINEL, check_bytes, inserted, partly_numbered

# Drawings of the corpus that must take an arch and be processed: marked, or checked where they are older than marks can be.
LEAST_CORPUS = 499


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
    for layout in doc.layouts:
        for entity in layout:
            if entity.has_xdata(APP.decode()):
                ours += 1
            else:
                entities += 1
    return (codes, entities, ours), how


def features(path):
    import pyogrio

    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            return pyogrio.read_info(path, layer="entities", force_feature_count=True)["features"]
    except Exception:
        return None


def version_of(data):
    if data.startswith(SENTINEL):
        match = re.search(rb"\$ACADVER\0\x01\0?([^\0]*)\0", data)
    else:
        match = re.search(rb"\$ACADVER\s*\n\s*1\s*\n\s*(\S+)", data)
    return match.group(1).decode("latin1") if match else None


def before_marks(version):
    """Older than extended data: R11 and R12 are AC1009, and what names no version counts as R12."""
    if version is None:
        return False
    match = re.fullmatch(r"AC(\d+)(\.\d+)?", version)
    return match is None or match.group(2) is not None or int(match.group(1)) < 1009


def error_of(run):
    result = json.loads(run.stdout) if run.stdout.strip() else {"runs": []}
    if result["runs"] and result["runs"][0]["error"]:
        error = result["runs"][0]["error"]
        return error["check"], error["message"]
    return "?", run.stderr.decode(errors="replace")[:300]


def one(task):
    """Marks one drawing: its state, the reason of a refusal, the problems found, and what the readers saw."""
    binary, number, (group, name, data, job), folder = task
    base = pathlib.Path(folder) / f"{number:05}"
    base.mkdir(parents=True)
    source, marked = base / "drawing.dxf", base / "drawing.thrust.dxf"
    again, restored = base / "again.dxf", base / "restored.dxf"
    source.write_bytes(data)
    if job:
        (base / "thrustmark.toml").write_text(job, encoding="utf-8")
    seen = {"version": version_of(data) or "none", "form": "binary" if data.startswith(SENTINEL) else "ASCII"}
    try:
        state, why, problems = marks(binary, data, source, marked, again, restored, seen)
    except Exception as error:
        state, why, problems = "failed", "", [f"{type(error).__name__}: {error}"]
    return number, state, why, problems, seen


def marks(binary, data, source, marked, again, restored, seen):
    problems = []
    call = lambda *words: subprocess.run([binary, *words], capture_output=True, timeout=300)
    run = call("mark", source, "--json", "-")
    if run.returncode == 2:
        check, message = error_of(run)
        if marked.exists():
            problems.append("refused, yet a copy stands there")
        if "panicked" in message or check == "?":
            problems.append(f"no clear refusal: {message}")
        if before_marks(version_of(data)):
            looked = call("check", source, "--json", "-")
            if check != "old-version" or looked.returncode == 2:
                problems.append(f"too old to be marked, yet: {check}; check: {error_of(looked)}")
            return "checked", f"{check}: {message}", problems
        return "refused", f"{check}: {message}", problems
    if run.returncode not in (0, 1, 3):
        return "failed", "", [f"exit status {run.returncode}: " + run.stderr.decode(errors="replace")[:500]]
    out = marked.read_bytes()
    if source.read_bytes() != data:
        problems.append("the source was changed")
    wrong = check_bytes(data, out)
    if wrong:
        problems.append(wrong)
    undo = call("unmark", marked, "--output", restored)
    if undo.returncode != 0:
        problems.append("unmark: " + undo.stderr.decode(errors="replace")[:300])
    elif hashlib.sha256(restored.read_bytes()).digest() != hashlib.sha256(data).digest():
        problems.append("unmark does not give back the source")
    twice = call("mark", marked, "--output", again)
    if twice.returncode == 2:
        problems.append("marking twice: " + twice.stderr.decode(errors="replace")[:300])
    elif again.read_bytes() != out:
        problems.append("marking twice is not marking once")
    ours = inserted(out)
    seen["ours"] = ours
    if ours == 0:
        problems.append("nothing was put in")
    problems += audited(data, source, marked, ours, seen)
    before = features(source) if seen["form"] == "ASCII" else None
    if before is not None:
        seen["ogr"] = True
        after = features(marked)
        if after is None:
            problems.append("OGR reads the source and not the copy")
        elif after - before != ours:
            problems.append(f"OGR sees {after - before} entities more, and {ours} were put in")
    return "marked", "", problems


def audited(data, source, marked, ours, seen):
    before, how_before = audit(source)
    after, how_after = audit(marked)
    if before is None:
        return []
    seen["ezdxf"] = how_before
    if after is None or how_after != how_before:
        return [f"ezdxf read the source by {how_before}, the copy: {how_after}"]
    problems = []
    new = after[0] - before[0]
    if seen["form"] == "ASCII" and not HANDLES.search(data):
        # A drawing without a single handle: every one of its tables is complained of, and one that we made too.
        for code in list(new):
            if before[0][code] and code.name == "INVALID_TABLE_HANDLE":
                del new[code]
    if new:
        problems.append(f"ezdxf's audit finds new: {dict(new)}")
    if after[1] != before[1]:
        problems.append(f"ezdxf saw {before[1]} entities, now {after[1]} beside ours")
    if before[1] == 0 and after[2] == 0:
        # A section without an end: ezdxf takes nothing from it, not even what the source has there.
        seen["unseen"] = True
    elif after[2] != ours:
        problems.append(f"ezdxf sees {after[2]} of our {ours} entities")
    if problems and partly_numbered(data):
        # ezdxf numbers the records that have no handle itself, and meets the handles that are there.
        del seen["ezdxf"]
        return []
    return problems


def third(results, folder, modules):
    """The third reader over all ASCII copies at once; adds its problems to the results."""
    script = pathlib.Path(__file__).with_name("third.cjs")
    marked = [r for r in results if r[1] == "marked" and r[4]["form"] == "ASCII"]
    names = []
    for number, *_ in marked:
        base = pathlib.Path(folder) / f"{number:05}"
        names += [str(base / "drawing.dxf"), str(base / "drawing.thrust.dxf")]
    run = subprocess.run(
        ["node", str(script), str(modules)], input="\n".join(names) + "\n", capture_output=True, text=True, check=True
    )
    counts = [json.loads(line) for line in run.stdout.splitlines()]
    assert len(counts) == len(names), run.stderr[:500]
    for result, before, after in zip(marked, counts[0::2], counts[1::2]):
        problems, seen = result[3], result[4]
        if before is None:
            continue
        seen["third"] = True
        if after is None:
            problems.append("dxf-parser reads the source and not the copy")
        elif after["entities"] - before["entities"] != seen["ours"]:
            problems.append(f"dxf-parser sees {after['entities'] - before['entities']} more, {seen['ours']} were put in")
        elif after["layers"] <= before["layers"]:
            problems.append("dxf-parser sees no layer of ours")


def edited(binary, folder, fixtures):
    """Marked copies that ezdxf saved again: `unmark` must say that they are not the source, or give it back; never damage.

    With --force what is left holds nothing of ours, and as many entities as the source."""
    import ezdxf

    problems = []
    for _, name, data, job in fixtures:
        base = pathlib.Path(folder) / ("edited " + name)
        base.mkdir()
        source, marked = base / "drawing.dxf", base / "drawing.thrust.dxf"
        saved, rest = base / "saved.dxf", base / "rest.dxf"
        source.write_bytes(data)
        (base / "thrustmark.toml").write_text(job, encoding="utf-8")
        subprocess.run([binary, "mark", source], capture_output=True, timeout=300)
        doc = ezdxf.readfile(marked)
        for entity in doc.modelspace().query("POINT"):
            entity.translate(0.0, 0.25, 0.0)
        doc.saveas(saved)
        undo = subprocess.run([binary, "unmark", saved, "--output", rest], capture_output=True, timeout=300)
        words = undo.stderr.decode(errors="replace")
        if undo.returncode != 2 or rest.exists() or "not the source" not in words:
            problems.append(f"edited {name}: unmark ended in {undo.returncode}: {words[:300]}")
            continue
        forced = subprocess.run([binary, "unmark", saved, "--force", "--output", rest], capture_output=True, timeout=300)
        if forced.returncode != 0:
            problems.append(f"edited {name}: unmark --force: {forced.stderr.decode(errors='replace')[:300]}")
            continue
        left, _ = audit(rest)
        before, _ = audit(source)
        if left is None or left[2] or left[1] != before[1] or left[0] - before[0]:
            problems.append(f"edited {name}: of {before} unmark --force leaves {left}")
        if b"THRUST-" in rest.read_bytes():
            problems.append(f"edited {name}: unmark --force leaves names of ours")
    return problems


def without_arch(binary, folder, left):
    """The drawings that take no arch, as they are: each must be refused, with nothing written."""
    problems, reasons = [], collections.Counter()
    for name, data, _ in left:
        base = pathlib.Path(folder) / ("left " + name)
        base.mkdir()
        source = base / "drawing.dxf"
        source.write_bytes(data)
        run = subprocess.run([binary, "mark", source, "--json", "-"], capture_output=True, timeout=300)
        check, message = error_of(run)
        reasons[check] += 1
        if run.returncode != 2 or check == "?" or [p.name for p in base.iterdir()] != ["drawing.dxf"]:
            problems.append(f"{name}, which takes no arch: status {run.returncode}, {check}: {message}")
    return problems, reasons


def table(tasks, results, reasons):
    """docs/readers.md: how many drawings of which kind were marked, and what each reader could tell."""
    rows = collections.defaultdict(collections.Counter)
    refused = collections.Counter()
    for number, state, why, problems, seen in results:
        group = tasks[number][0]
        row = rows[group, seen["version"], seen["form"]]
        row["drawings"] += 1
        row[state] += 1
        for reader in ("ezdxf", "ogr", "third"):
            row[reader] += reader in seen
        row["problems"] += bool(problems)
        row["ours"] += seen.get("ours", 0)
        if state == "refused":
            refused[group, why.split(":")[0]] += 1
    refused.update({("corpus, as it is: takes no arch", check): n for check, n in reasons.items()})
    columns = ("drawings", "marked", "checked", "refused", "ezdxf", "ogr", "third", "ours", "problems")
    out = [
        "# What other readers make of marked copies",
        "",
        "Written by `tests/readers/readers.py --table`; not by hand. Each drawing is marked, the copy held against the source",
        "byte by byte, unmarked to the source's hash, and marked again to the same bytes; three readers then count what they",
        "see in source and copy. *marked*: a copy was written. *checked*: older than extended data; computed, and marking",
        "refused. *refused*: by the reasons below. *ezdxf*, *OGR*, *dxf-parser*: copies that the reader could compare, which",
        "are those whose source it can read (the last two read no binary drawings). *new*: entities put in, which each",
        "of them must see, and nothing else. *problems*: drawings with any difference.",
        "",
        "| drawings of | `$ACADVER` | form | drawings | marked | checked | refused | ezdxf | OGR | dxf-parser | new | problems |",
        "| --- | --- | --- | --: | --: | --: | --: | --: | --: | --: | --: | --: |",
    ]
    total = collections.Counter()
    for (group, version, form), row in sorted(rows.items()):
        total.update(row)
        out.append(f"| {group} | {version} | {form} | " + " | ".join(str(row[c]) for c in columns) + " |")
    out.append("| all | | | " + " | ".join(str(total[c]) for c in columns) + " |")
    out += ["", "Refused, with nothing written (docs/refusals.md has the words):", ""]
    out += ["| drawings of | `error.check` | drawings |", "| --- | --- | --: |"]
    out += [f"| {group} | `{check}` | {n} |" for (group, check), n in sorted(refused.items())]
    return "\n".join(out) + "\n"


def main():
    logging.disable(logging.CRITICAL)
    p = argparse.ArgumentParser()
    p.add_argument("binary")
    p.add_argument("--shared", type=pathlib.Path)
    p.add_argument("--fixtures", type=pathlib.Path)
    p.add_argument("--modules", type=pathlib.Path, help="folder that holds dxf-parser; without it that reader is left out")
    p.add_argument("--table", type=pathlib.Path)
    p.add_argument("--only", help="drawings whose name holds this")
    p.add_argument("--jobs", type=int, default=2)
    a = p.parse_args()
    binary = str(pathlib.Path(a.binary).resolve())
    found, left, with_corpus = [], [], bool(a.shared and (a.shared / "corpus").is_dir())
    if a.fixtures:
        found += drawings.fixtures(a.fixtures)
    found += drawings.generated()
    if with_corpus:
        taken, left = drawings.corpus(a.shared)
        found += taken
    else:
        print("SKIPPED: no shared corpus here; only the fixtures and the generated drawings are read")
    found = [d for d in found if not a.only or a.only in d[1]]
    with tempfile.TemporaryDirectory() as folder:
        tasks = [(binary, number, drawing, folder) for number, drawing in enumerate(found)]
        with concurrent.futures.ProcessPoolExecutor(a.jobs) as pool:
            results = list(pool.map(one, tasks, chunksize=4))
        if a.modules:
            third(results, folder, a.modules)
        else:
            print("SKIPPED: the third reader; no --modules")
        changed, reasons = without_arch(binary, folder, left)
        changed += edited(binary, folder, [d for d in found if d[0] == "fixtures"])
    total = collections.Counter()
    bad = len(changed)
    for problem in changed:
        print(f"PROBLEM  {problem}")
    for number, state, why, problems, seen in results:
        group, name = found[number][:2]
        total[state] += 1
        total[f"{group} {state}"] += 1
        bad += bool(problems)
        for reader in ("ezdxf", "ogr", "third"):
            total[reader] += reader in seen
        if state == "refused":
            print(f"refused  {name}: {why}")
            # Made here or by hand to be read: a refusal is a fault.
            if group != "corpus":
                bad += 1
                print(f"PROBLEM  {name}: must be read")
        for problem in problems:
            print(f"PROBLEM  {name}: {problem}")
    for name, _, why in left:
        print(f"takes no arch: {name}: {why}")
    print("readers:", ", ".join(f"{k} {v}" for k, v in sorted(total.items())))
    processed = total["corpus marked"] + total["corpus checked"]
    if with_corpus and not a.only and processed < LEAST_CORPUS:
        bad += 1
        print(f"PROBLEM  only {processed} drawings of the corpus were processed, {LEAST_CORPUS} can be")
    if a.table and with_corpus:
        a.table.write_text(table(found, results, reasons), encoding="utf-8")
    print(f"{len(found) - bad} passed, {bad} failed")
    return 1 if bad or not total["marked"] else 0


if __name__ == "__main__":
    sys.exit(main())
