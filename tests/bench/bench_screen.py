"""Key to last byte, and bytes on the wire, of the screen in a pseudo-terminal.

    python tests/bench/bench_screen.py             hand-made run files of 240, 2,000 and 20,000 channels, idle
    python tests/bench/bench_screen.py --scoring   also while 20 million random readings of as many channels are scored

Idle, an answer is taken as complete when nothing came for QUIET seconds; its time is that of its last byte. In the
wide layout that includes the plot of the channel, which is drawn by another thread and follows the cursor. While
scoring, something always comes: there the time is that until the pointer is on another channel.
"""

import argparse
import os
import sys
import tempfile
import time
from pathlib import Path

import numpy as np
import polars as pl

sys.path.insert(0, str(Path(__file__).parent.parent / "support"))

from made_run import made_run
from pseudo_terminal import PseudoTerminal

QUIET = 0.15
READINGS = 20_000_000
"""Of the table that is scored."""
ENVIRONMENT = {**os.environ, "TERM": "xterm-256color", "LANG": "C.UTF-8", "LC_ALL": "C.UTF-8"}
PROGRAM = [sys.executable, "-m", "screener"]
SIZES = ((80, 24), (140, 45))
HEADER = f"{'':20} {'p50 ms':>8} {'p95 ms':>8} {'max ms':>8} {'bytes p50':>10} {'bytes max':>10}"

ACTIONS: tuple[tuple[str, tuple[str, ...]], ...] = (
    ("cursor down", ("\x1b[B",)),
    ("page down", ("\x1b[6~",)),
    ("last, first row", ("\x1b[F", "\x1b[H")),
    ("sort by p, r", ("6", "4")),
    ("reverse", ("S",)),
    ("flagged only, all", ("f", "f")),
    ("condition, all", ("wr < 0.98\r", "w" + "\x15" + "\r")),
    ("decide, undo", ("x", "z")),
    ("next view", ("v",)),
    ("next family", ("]",)),
    ("open, close plot", ("\r", "\r")),
)


def main() -> None:
    """Print one table per size of window and of run."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--scoring", action="store_true")
    parser.add_argument("--repeats", type=int, default=40)
    given = parser.parse_args()
    scoring, repeats = given.scoring, given.repeats
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        for channels in (240, 2_000, 20_000):
            made_run(folder / f"{channels}.run", channels).close()
            for size in SIZES:
                measure(folder, f"{channels}.run", size, f"{channels:,} channels, idle", repeats)
        for channels in (240, 2_000, 20_000) if scoring else ():
            table = pl.DataFrame(np.random.default_rng(1).normal(size=(READINGS // channels, channels)))
            table.write_parquet(folder / "table.parquet", compression="uncompressed")
            for size in SIZES:
                (folder / "table.run").unlink(missing_ok=True)
                measure_scoring(folder, "table.parquet", size, channels)


def measure(folder: Path, path: str, size: tuple[int, int], title: str, repeats: int) -> None:
    """One run of the program, all actions."""
    began = time.perf_counter()
    with PseudoTerminal([*PROGRAM, path], columns=size[0], rows=size[1], environment=ENVIRONMENT, folder=folder) as run:
        run.wait_for("Reading")
        frame = time.perf_counter() - began
        run.wait_for("1 of ")
        rows = time.perf_counter() - began
        print(f"\n{title}, {size[0]} x {size[1]}: first frame {frame:.2f} s, first rows {rows:.2f} s")
        print(HEADER)
        settle(run)
        for name, keys in ACTIONS:
            report(name, [answer(run, keys[k % len(keys)]) for k in range(repeats)])
        run.send("q")
        began = time.perf_counter()
        run.exit_code()
        print(f"{'quit':20} {1e3 * (time.perf_counter() - began):8.0f}")


def measure_scoring(folder: Path, path: str, size: tuple[int, int], channels: int) -> None:
    """Cursor steps, one after the other, as long as scoring lasts."""
    began = time.perf_counter()
    with PseudoTerminal([*PROGRAM, path], columns=size[0], rows=size[1], environment=ENVIRONMENT, folder=folder) as run:
        run.wait_for(lambda text: "1 of " in text or "Scored in" in text)
        print(
            f"\n{channels:,} channels, scoring, {size[0]} x {size[1]}: first rows {time.perf_counter() - began:.2f} s"
        )
        print(HEADER)
        steps: list[tuple[float, int]] = []
        while " a second" in run.text:
            steps.append(effect(run, "\x1b[B" if len(steps) % 2 == 0 else "\x1b[A"))
            time.sleep(0.05)
        if steps:
            report("cursor down, up", steps)
        else:
            print("scored before the first key")


def effect(run: PseudoTerminal, key: str) -> tuple[float, int]:
    """Seconds from a key until the pointer is on another channel, and the bytes that came until then."""
    before, began, count = pointed(run), time.perf_counter(), 0
    run.send(key)
    while pointed(run) in {"", before} and time.perf_counter() - began < 5.0:
        count += run.read(0.02)
    return run.read_at - began, count


def pointed(run: PseudoTerminal) -> str:
    """The channel that the pointer is on."""
    return next((line[2:].split()[0] for line in run.lines if line.startswith(">") and line[2:].strip()), "")


def report(name: str, answers: list[tuple[float, int]]) -> None:
    """One line of the table."""
    times = 1e3 * np.array([seconds for seconds, _ in answers])
    sizes = np.array([count for _, count in answers])
    p50, p95 = np.percentile(times, [50, 95])
    print(f"{name:20} {p50:8.0f} {p95:8.0f} {times.max():8.0f} {np.median(sizes):10.0f} {sizes.max():10d}")


def settle(run: PseudoTerminal) -> None:
    """Wait until nothing more comes, or for a second when something always does."""
    end = time.monotonic() + 1.0
    while run.read(QUIET) and time.monotonic() < end:
        pass


def answer(run: PseudoTerminal, key: str) -> tuple[float, int]:
    """Seconds from a key to the last byte of what it brought, and how many bytes those were."""
    began = last = time.perf_counter()
    run.send(key)
    count = 0
    while time.perf_counter() - began < 1.0:
        piece = run.read(QUIET)
        if not piece:
            break
        count += piece
        last = run.read_at
    return last - began, count


if __name__ == "__main__":
    main()
