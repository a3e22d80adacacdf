"""Broken and hostile files: none may raise anything but Unreadable, hang, crash or take much memory.

    python tests/fuzz.py [seconds] [first seed]

Each seed makes one file: a sound workbook or text file with bytes flipped, parts of its archive cut,
swapped or rewritten, or cells exchanged. A second process reads them, so that a crash is seen and named.
"""

import io
import random
import re
import resource
import subprocess
import sys
import threading
import time
import zipfile
from pathlib import Path

ROOT = Path(__file__).resolve().parent.parent
sys.path.insert(0, str(ROOT))

MEMORY = 500
"""Megabytes that reading a small file may take at most."""

LONGEST = 20
"""Seconds that reading a small file may take at most, on a slow and busy machine."""

ODD_CELLS = [
    "",
    " ",
    "\u00a0",
    "-",
    "x",
    "n/a",
    "closed",
    "NaN",
    "inf",
    "-5",
    "(5)",
    "1e400",
    "1,234",
    "1.234",
    "12 t",
    "5 tons",
    "€5",
    "=1+1",
    "Total",
    "Depot",
    "Customer",
    "Rate",
    "Ordered",
    "Available",
    "Send",
    "\x00",
    "\ud7ff",
    "9" * 400,
    "a" * 5000,
    "0x10",
    "٣",
    "½",
    "²",
    "−3",
    "5%",
    "2026-01-01",
    "TRUE",
    "#N/A",
    "'",
    '"',
    "🚚",
]
ODD_XML = [
    b"<c/>",
    b"<row/>",
    b'<c r="XFD1048576"><v>1</v></c>',
    b'<c r="A0"><v>1</v></c>',
    b'<c r="ZZZZ9"><v>1</v></c>',
    b"<v>1e999</v>",
    b"<v>nan</v>",
    b'<c t="s"><v>99999999</v></c>',
    b'<c t="e"><v>#N/A</v></c>',
    b"<f>1+1</f>",
    b'<c t="d"><v>2026-13-45</v></c>',
    b"&#0;",
    b"&nonsense;",
    b"<!-- x -->",
    b"<![CDATA[<c/>]]>",
    b"\xff\xfe",
    b'<row r="1048577">',
    b'<mergeCell ref="A1:XFD1048576"/>',
    b'<row r="99999999999999999999">',
    b"</sheetData>",
    b'<c r="A1" t="inlineStr"><is><t>Depot</t></is></c>',
    b'<c r = "XFD1048576"><v>1</v></c>',
]


def sound_files():
    """The files that everything is made from."""
    from tests.intake.books import ods, xlsb
    from tests.intake.sheets import plain, text_file, workbook

    grid = [["", "Aster", "Birch"], ["Northgate", 12.5, 13], ["Quarry", "x", 11]]
    files = [
        workbook(plain()),
        workbook(plain(Rates=grid)),
        ods(plain()),
        xlsb(plain()),
        text_file("d.csv", "Depot;Available\nNorthgate;120,5\nQuarry;80\n"),
        text_file("r.txt", "Depot\tCustomer\tRate\nNorthgate\tAster\t12.5\n", "utf-16"),
    ]
    files += [
        (path.name, path.read_bytes()) for path in sorted((ROOT / "tests/intake/files").glob("errors.*"))
    ]
    return files


def made(seed, files):
    """The name and bytes of one broken file."""
    draw = random.Random(seed)
    name, data = draw.choice(files)
    if data[:2] == b"PK" and draw.random() < 0.8:
        return name, rezipped(draw, data)
    if draw.random() < 0.3 and name.endswith((".csv", ".txt")):
        return name, odd_text(draw)
    return name, scrambled(draw, data)


def scrambled(draw, data):
    data = bytearray(data)
    for _ in range(draw.choice([1, 1, 2, 5, 40])):
        kind, at = draw.randrange(5), draw.randrange(max(1, len(data)))
        if kind == 0 and data:
            data[at % len(data)] = draw.randrange(256)
        elif kind == 1:
            del data[at:]
        elif kind == 2:
            del data[at : at + draw.randrange(1, 200)]
        elif kind == 3:
            data[at:at] = draw.randbytes(draw.randrange(1, 100))
        else:
            data[at:at] = data[: draw.randrange(1, 500)]
    return bytes(data)


def odd_text(draw):
    separator = draw.choice([",", ";", "\t", "|", ";;"])
    rows = [
        [draw.choice(ODD_CELLS) for _ in range(draw.randrange(1, 8))] for _ in range(draw.randrange(1, 30))
    ]
    rows.insert(draw.randrange(3), ["Depot", "Customer", "Rate", "Available"])
    text = draw.choice(["\n", "\r\n", "\r"]).join(separator.join(row) for row in rows)
    return text.encode(draw.choice(["utf-8", "utf-16", "utf-8-sig", "utf-7"]), "replace")


def rezipped(draw, data):
    """The archive with some of its parts rewritten, renamed, emptied or blown up."""
    stream = io.BytesIO()
    with zipfile.ZipFile(io.BytesIO(data)) as old, zipfile.ZipFile(stream, "w", zipfile.ZIP_DEFLATED) as new:
        for member in old.namelist():
            body, kind = old.read(member), draw.randrange(12)
            if kind == 0:
                body = scrambled(draw, body)
            elif kind == 1 and member.endswith(".xml"):
                at = draw.choice([m.start() for m in re.finditer(rb"<", body)] or [0])
                body = body[:at] + draw.choice(ODD_XML) + body[at:]
            elif kind == 2:
                values = re.findall(rb"(?<=>)[^<]+(?=<)", body) or [b"?"]
                body = body.replace(
                    draw.choice(values), draw.choice(ODD_CELLS).encode("utf-8", "replace")[:300]
                )
            elif kind == 3 and draw.random() < 0.2:
                continue
            elif kind == 4 and draw.random() < 0.2:
                body += b" " * 30_000_000
            elif kind == 5:
                body = re.sub(
                    rb'"(\d+)"', lambda m: b'"%d"' % draw.choice([0, 1, 7, 10**9, 2**64]), body, count=3
                )
            elif kind == 6:
                body = re.sub(rb"\b[A-Z]\d\b", draw.choice([b"XFD9", b"A1048576", b"B2"]), body, count=2)
            new.writestr(member, body)
    packed = stream.getvalue()
    return scrambled(draw, packed) if draw.random() < 0.1 else packed


def peak():
    """Peak memory of this process in MB."""
    for line in Path("/proc/self/status").read_text().splitlines():
        if line.startswith("VmHWM"):
            return int(line.split()[1]) // 1024
    return resource.getrusage(resource.RUSAGE_SELF).ru_maxrss // 1024


def read_all():
    """Read the files of the seeds that come in; say how each ended."""
    from engine.intake.reading import read_week
    from engine.intake.refusal import Unreadable

    files = sound_files()
    for line in sys.stdin:
        start = time.perf_counter()
        try:
            reading = read_week(made(int(line), files))
            told = reading.rows_read == reading.rows_used + reading.rows_named
            ended = "read" if told else f"FAULT rows {reading.counts}"
        except Unreadable as refused:
            ended = "refused" if "\n" not in str(refused) and refused.finding.mend else "FAULT refusal"
        except Exception as error:
            ended = f"FAULT {type(error).__name__} {str(error)[:200]!r}"
        sys.stdout.write(f"{line.strip()} {time.perf_counter() - start:.2f} {peak()} {ended}\n")
        sys.stdout.flush()


def run(seconds, first=0, say=print):
    """Read broken files for some seconds; returns the faults found, each with its seed."""
    faults, ends, seed, worker = [], {"read": 0, "refused": 0}, first, None
    until = time.monotonic() + seconds
    worst = (0.0, 0)
    while time.monotonic() < until:
        if worker is None:
            pipes = {"stdin": subprocess.PIPE, "stdout": subprocess.PIPE, "stderr": subprocess.DEVNULL}
            worker = subprocess.Popen([sys.executable, __file__, "--read"], **pipes, text=True)
        worker.stdin.write(f"{seed}\n")
        worker.stdin.flush()
        watch = threading.Timer(3 * LONGEST, worker.kill)
        watch.start()
        answer = worker.stdout.readline().split(" ", 3)
        watch.cancel()
        if len(answer) < 4:
            faults.append((seed, f"the process ended with status {worker.wait()}"))
            worker = None
        else:
            taken, memory, ended = float(answer[1]), int(answer[2]), answer[3].strip()
            worst = max(worst[0], taken), max(worst[1], memory)
            ends[ended] = ends.get(ended, 0) + 1
            if ended.startswith("FAULT") or taken > LONGEST or memory > MEMORY:
                faults.append((seed, f"{ended}, {taken:.1f} s, {memory} MB"))
        seed += 1
    if worker is not None:
        worker.stdin.close()
        worker.wait()
    say(
        f"{seed - first} files: {ends['read']} read, {ends['refused']} refused, {len(faults)} faults; "
        f"longest {worst[0]:.1f} s, peak memory {worst[1]} MB"
    )
    for number, fault in faults[:20]:
        say(f"  seed {number}: {fault}")
    return faults


if __name__ == "__main__":
    if sys.argv[1:2] == ["--read"]:
        read_all()
    else:
        numbers = [int(word) for word in sys.argv[1:]]
        sys.exit(1 if run(*(numbers or [60])) else 0)
