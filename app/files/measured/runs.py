"""From rows of numbers to tables: which rows belong together, and which lines stand above them."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field
from itertools import pairwise

from app.files.measured.model import Delimiter
from app.files.measured.scan import Line, LineKind
from app.files.quoting import quote

LEAST_ROWS = 3
_FAR = 10.0  # steps of a table; a row farther off does not go on with it
_LOOKED_AT = 20


@dataclass(slots=True)
class Run:
    """Rows that stand together, and the lines between them and the run before."""

    above: list[Line]
    rows: list[Line]
    width: int
    gapped: bool = False  # nothing but blank or comment lines above


@dataclass(slots=True)
class Runs:
    """All runs of a text, the lines below the last, and what was passed over."""

    runs: list[Run] = field(default_factory=list)
    below: list[Line] = field(default_factory=list)
    problems: list[str] = field(default_factory=list)


def find_runs(lines: Iterable[Line], delimiter: Delimiter) -> Runs:
    """Collect the runs of a text and bring them into tables."""
    found = _collected(lines, delimiter)
    for run in found.runs:
        _lift_headings(run)
    found.runs = _joined([run for run in found.runs if run.rows])
    _drop_small(found)
    found.runs = _joined(found.runs)
    return found


def _collected(lines: Iterable[Line], delimiter: Delimiter) -> Runs:
    found = Runs()
    above: list[Line] = []
    current: Run | None = None
    gap = False
    for line in lines:
        if line.kind is LineKind.BLANK:
            gap = True
        elif line.kind is LineKind.ROW or (line.kind is LineKind.REST and current is not None and not above):
            if current is None or above or gap or not _fits(line, current, delimiter):
                if line.kind is LineKind.REST:
                    above.append(line)
                    continue
                only_comments = all(entry.kind is LineKind.COMMENT for entry in above)
                begun = _taken_back(above, line.number, delimiter)
                width = max(len(row.cells) for row in [*begun, line])
                current = Run(above, begun, width, gapped=bool(found.runs) and only_comments)
                found.runs.append(current)
                above, gap = [], False
            current.rows.append(line)
            current.width = max(current.width, len(line.cells))
        else:
            above.append(line)
    found.below = above
    return found


def _taken_back(above: list[Line], before: int, delimiter: Delimiter) -> list[Line]:
    """Take from the lines above a table its first rows, where these have but one number and empty cells."""
    start = len(above)
    while start and above[start - 1].kind is LineKind.REST and delimiter in above[start - 1].text:
        if above[start - 1].words_at() or delimiter == " " or above[start - 1].number != before - 1:
            break
        before -= 1
        start -= 1
    rows = above[start:]
    del above[start:]
    return rows


def _fits(line: Line, run: Run, delimiter: Delimiter) -> bool:
    """Say whether a row goes on with a run: cells may be missing at its end, or at the ends of all rows before."""
    count = len(line.cells)
    if count == run.width:
        return True
    if delimiter == " ":
        return False
    return count < run.width or (bool(run.above) and count <= len(run.above[-1].cells))


def _lift_headings(run: Run) -> None:
    """Count a first row as a heading where it has words above numbers, such as "V; 100; 50; 20"."""
    while len(run.rows) > 1:
        first, second = run.rows[0], run.rows[1]
        numbers = {index for index, value in enumerate(second.values) if value == value}
        if numbers.isdisjoint(first.words_at()):
            return
        run.above.append(run.rows.pop(0))
        run.gapped = False


def _joined(runs: Sequence[Run]) -> list[Run]:
    """Join runs that only a gap, or a heading repeated as on every page, parts in the middle of a table."""
    joined: list[Run] = []
    for run in runs:
        before = joined[-1] if joined else None
        if before is not None and run.width == before.width and _goes_on(before, run):
            before.rows += run.rows
        else:
            joined.append(run)
    return joined


def _goes_on(before: Run, run: Run) -> bool:
    if not run.gapped and (not before.above or _wording(run) != _wording(before)):
        return False
    if run.gapped and len(before.rows) < LEAST_ROWS:
        return True  # rows on every second line
    ahead = [row.values[0] for row in before.rows[-_LOOKED_AT:]]
    steps = sorted(after - before for before, after in pairwise(ahead) if after != before)
    if not steps:
        return False
    typical, next_step = steps[len(steps) // 2], run.rows[0].values[0] - ahead[-1]
    return (next_step > 0) == (typical > 0) and 0 < abs(next_step) <= _FAR * abs(typical)


def _wording(run: Run) -> list[str]:
    return ["".join(letter for letter in line.text if not letter.isdigit()).strip() for line in run.above]


def _drop_small(found: Runs) -> None:
    """Take runs of one or two rows for lines of text where the text has a real table."""
    if all(len(run.rows) < LEAST_ROWS for run in found.runs):
        return
    kept: list[Run] = []
    carried: list[Line] = []
    gapped = True
    for run in found.runs:
        if len(run.rows) < LEAST_ROWS:
            found.problems += [_passed_over(row) for row in run.rows]
            carried += run.above + run.rows
            gapped = gapped and run.gapped
            continue
        if carried:
            run.gapped = run.gapped and gapped and bool(kept)
            run.above = carried + run.above
        kept.append(run)
        carried, gapped = [], True
    found.runs = kept
    found.below = carried + found.below


def _passed_over(row: Line) -> str:
    return f"Line {row.number}, {quote(row.text.strip())}, does not fit the table beside it: it was passed over."
