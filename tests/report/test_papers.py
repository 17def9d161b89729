"""Summary, report, wiring list and schedule as golden text, and what they must hold."""

from __future__ import annotations

import csv
import dataclasses
import io
from pathlib import Path

import pytest
from handmade import (
    SLUICE_BOTH,
    SLUICE_BRIDGE_FACTS,
    SLUICE_DESIGN,
    SLUICE_FACTS,
    SLUICE_JOB,
    SLUICE_NETWORK,
    SLUICE_RESULT,
)

from contactlogic.design import Bound, Design, Result
from contactlogic.job.model import Job, Limits, Load, SeparateContacts, Supply
from contactlogic.network import Network, Pole
from contactlogic.report.cautions import CAUTIONS
from contactlogic.report.facts import Facts, as_built, facts, longest_runs
from contactlogic.report.markdown import report
from contactlogic.report.phrases import budget, compared, saving
from contactlogic.report.summary import summary
from contactlogic.report.wiring import conductors, rail_terminals, schedule_csv, wiring_csv
from contactlogic.terminals import wire_numbers
from contactlogic.truth import Target

GOLDEN = Path(__file__).parent / "golden"

BOTH_FACTS = [SLUICE_FACTS, SLUICE_BRIDGE_FACTS]


def _check(name: str, text: str) -> None:
    assert text == (GOLDEN / name).read_text(encoding="utf-8")


def test_summary_text() -> None:
    _check("summary.txt", summary(SLUICE_RESULT, [SLUICE_FACTS], width=None))


def test_summary_text_of_both_forms() -> None:
    _check("summary-both.txt", summary(SLUICE_BOTH, BOTH_FACTS, width=None))


def test_verbose_summary_text() -> None:
    _check("summary-verbose.txt", summary(SLUICE_RESULT, [SLUICE_FACTS], width=None, verbose=True))


def test_report_text() -> None:
    _check("report.md", report(SLUICE_RESULT, [SLUICE_FACTS]))


def test_wiring_text() -> None:
    _check("wiring.csv", wiring_csv(SLUICE_DESIGN, SLUICE_JOB))


def test_schedule_text() -> None:
    _check("schedule.csv", schedule_csv(SLUICE_DESIGN, SLUICE_JOB))


def test_summary_folds_to_the_width_and_keeps_every_letter() -> None:
    long = " + ".join(f"K{i}A K{i}B'" for i in range(20))
    facts = dataclasses.replace(SLUICE_FACTS, formulas={"LAMP": long, "HORN": "UP' DOWN"})
    text = summary(SLUICE_RESULT, [facts], width=60)
    assert max(map(len, text.splitlines())) <= 60
    assert all(f"K{i}B'" in text for i in range(20))
    assert "\x1b" not in text


def _constants() -> tuple[Result, Facts]:
    job = Job(
        title="Constants",
        relays=("A",),
        loads=(Load("LIT", Target(1, on=3)), Load("DARK", Target(1, on=0), kind="coil")),
        listed=3,
    )
    network = Network(("A",), "L", {"LIT": "L", "DARK": None}, ())
    design = Design("ladder", network, Bound(0, True), 2)
    facts = Facts({"LIT": "1", "DARK": "0"}, frozenset(), as_built(network), longest_runs(network))
    return Result(job, (design,), job.relays), facts


def test_constant_loads_are_said_to_be_so() -> None:
    result, facts = _constants()
    text = summary(result, [facts], width=None)
    assert text.startswith("on with every relay released: LIT\n")
    assert "1  (always on)" in text
    assert "0  (never on)" in text
    assert "longest run: 0 contacts\n" in text
    assert "Never on, so the feed terminal stays unwired: DARK." in report(result, [facts])


def test_constant_loads_are_wired_to_the_rails() -> None:
    result, _ = _constants()
    ends = [(c.start, c.end) for c in conductors(result.designs[0], result.job)]
    assert ends == [
        ("rail:SUPPLY", "LIT:X1"),
        ("rail:RETURN", "LIT:X2"),
        ("LIT:X2", "DARK:A2"),
    ]


def test_conductors_join_exactly_the_terminals_of_each_net() -> None:
    """The wires, followed from end to end, give back the network's nets and no others."""
    groups: dict[str, set[str]] = {}
    for wire in conductors(SLUICE_DESIGN, SLUICE_JOB):
        joined = groups.get(wire.start, {wire.start}) | groups.get(wire.end, {wire.end})
        groups.update(dict.fromkeys(joined, joined))
    found = {frozenset(group) for group in groups.values()}
    assert found == {
        frozenset({"rail:+24 V", "UP:11", "FLOOD:11"}),
        frozenset({"UP:14", "DOWN:11"}),
        frozenset({"UP:12", "DOWN:21"}),
        frozenset({"DOWN:12", "FLOOD:14", "LAMP:X1"}),
        frozenset({"DOWN:24", "HORN:X1"}),
        frozenset({"rail:0 V", "LAMP:X2", "HORN:X2"}),
    }
    nets = [wire.net for wire in conductors(SLUICE_DESIGN, SLUICE_JOB)]
    assert nets == sorted(nets)
    assert set(nets) == set(wire_numbers(SLUICE_NETWORK).values())


def test_loads_that_share_a_net_are_chained() -> None:
    job = dataclasses.replace(
        SLUICE_JOB,
        relays=("UP",),
        loads=(Load("L1", Target(1, on=2)), Load("L2", Target(1, on=2))),
        listed=3,
    )
    network = Network(("UP",), "L", {"L1": "n1", "L2": "n1"}, (Pole("UP", 1, "L", "n1"),))
    design = Design("ladder", network, Bound(1, True), 2)
    ends = [(c.net, c.start, c.end) for c in conductors(design, job)]
    assert ends == [
        (1, "rail:+24 V", "UP:11"),
        (2, "UP:14", "L1:X1"),
        (2, "L1:X1", "L2:X1"),
        (3, "rail:0 V", "L1:X2"),
        (3, "L1:X2", "L2:X2"),
    ]


def test_push_button_contacts_have_marks_of_their_own() -> None:
    job = dataclasses.replace(
        SLUICE_JOB,
        relays=("START",),
        loads=(Load("GO", Target(1, on=2)), Load("IDLE", Target(1, on=1))),
        limits=Limits(contacts={"START": SeparateContacts(1, 1)}),
        listed=3,
    )
    network = Network(
        ("START",),
        "L",
        {"GO": "n1", "IDLE": "n2"},
        (Pole("START", 1, "L", "n1"), Pole("START", 2, "L", None, "n2")),
    )
    design = Design("ladder", network, Bound(2, True), 2)
    terminals = {end for c in conductors(design, job) for end in (c.start, c.end)}
    assert {"START:13", "START:14", "START:21", "START:22"} <= terminals
    assert budget(job.limits, "START") == "1A1B"


@pytest.mark.parametrize(
    ("feed", "back", "terminals"),
    [
        ("+24 V", "0 V", ("rail:+24 V", "rail:0 V")),
        (None, None, ("rail:SUPPLY", "rail:RETURN")),
        ("  ", "N\n", ("rail:SUPPLY", "rail:N")),
        ("~", "~", ("rail:~ (feed)", "rail:~ (return)")),
    ],
)
def test_rail_terminals(feed: str | None, back: str | None, terminals: tuple[str, str]) -> None:
    job = dataclasses.replace(SLUICE_JOB, supply=Supply(feed, back))
    assert rail_terminals(job) == terminals


HOSTILE = '=cmd|"/c x"!A1 <script>`|`\n| # [x](y) *b* _u_'


def test_hostile_titles_stay_text() -> None:
    job = dataclasses.replace(SLUICE_JOB, title=HOSTILE, supply=Supply("=1+1", "|0|"))
    result = dataclasses.replace(SLUICE_RESULT, job=job)
    wiring = list(csv.reader(io.StringIO(wiring_csv(SLUICE_DESIGN, job))))
    assert {len(row) for row in wiring} == {5}
    cells = [cell for row in wiring for cell in row]
    assert not [cell for cell in cells if cell.startswith(("=", "+", "-", "@", "\t"))]
    text = report(result, [SLUICE_FACTS])
    assert "<script>" not in text.replace("\\<script\\>", "")
    table_rows = [line for line in text.splitlines() if line.startswith("| 1 | 1 | rail")]
    assert table_rows == ["| 1 | 1 | rail:=1+1 | UP:11 |"]
    assert text.splitlines()[0].startswith('# =cmd\\|"/c x"!A1 \\<script\\>\\`\\|\\` \\| \\#')


def test_every_paper_names_title_form_and_fingerprint() -> None:
    mark = f"ladder {SLUICE_DESIGN.fingerprint}"
    text = report(SLUICE_RESULT, [SLUICE_FACTS])
    assert text.startswith(f"# Sluice house\n\n{mark}\n")
    for lines in (
        wiring_csv(SLUICE_DESIGN, SLUICE_JOB).splitlines()[1:],
        schedule_csv(SLUICE_DESIGN, SLUICE_JOB).splitlines()[1:],
    ):
        assert lines
        assert all(line.endswith(f",{mark} Sluice house") for line in lines)


def test_cautions_close_the_report() -> None:
    text = report(SLUICE_RESULT, [SLUICE_FACTS])
    assert text.split("## Cautions\n\n")[1].splitlines() == [f"- {c}" for c in CAUTIONS]
    words = " ".join(CAUTIONS)
    for word in ("ratings", "insulation", "fusing", "suppression", "bonding", "functional safety"):
        assert word in words
    for word in ("Capacitors stay charged", "Emergency stops and guards", "Local codes"):
        assert word in words


def test_report_says_what_is_not_given() -> None:
    job = dataclasses.replace(SLUICE_JOB, supply=Supply(), file=None)
    text = report(dataclasses.replace(SLUICE_RESULT, job=job), [SLUICE_FACTS])
    assert "- job file: not given" in text
    assert "- supply, feed: not given" in text
    assert "- supply, return: not given" in text
    assert "| HORN | not given | not given |" in text


def test_bounds_are_told_apart() -> None:
    proved = dataclasses.replace(SLUICE_DESIGN, bound=Bound(4, True))
    result = dataclasses.replace(SLUICE_RESULT, designs=(proved,))
    assert "bound: at least 4 poles, proved minimum\n" in summary(
        result, [SLUICE_FACTS], width=None
    )
    assert "bound: at least 3 poles, minimum not proved\n" in summary(
        SLUICE_RESULT, [SLUICE_FACTS], width=None
    )


def test_what_is_on_at_rest_is_said_once_or_form_by_form() -> None:
    same = summary(SLUICE_BOTH, BOTH_FACTS, width=None)
    assert same.count("with every relay released") == 1
    assert same.startswith("no load is on with every relay released\n\nladder ")
    lit = dataclasses.replace(SLUICE_BRIDGE_FACTS, tables={"LAMP": 0b1, "HORN": 0})
    assert summary(SLUICE_BOTH, [SLUICE_FACTS, lit], width=None).startswith(
        "ladder: no load is on with every relay released\n"
        "bridge: on with every relay released: LAMP\n"
        "\n"
        "ladder "
    )


def test_the_saving_counts_what_the_objective_counts() -> None:
    assert saving(SLUICE_BOTH) == "the bridge saves 1 pole on the ladder"
    limits = dataclasses.replace(SLUICE_JOB.limits, objective="contacts")
    by_contacts = dataclasses.replace(
        SLUICE_BOTH, job=dataclasses.replace(SLUICE_JOB, limits=limits)
    )
    assert saving(by_contacts) == "the bridge saves 1 contact on the ladder"
    twice = dataclasses.replace(SLUICE_BOTH, designs=(SLUICE_DESIGN, SLUICE_DESIGN))
    assert saving(twice) == "the ladder saves no pole on the ladder"


def test_designs_side_by_side() -> None:
    assert compared(SLUICE_BOTH.designs) == [
        ("ladder", "4", "5", "9", "DOWN (2)", "at least 3 poles, minimum not proved"),
        ("bridge", "3", "4", "7", "UP (1)", "at least 3 poles, proved minimum"),
    ]
    text = report(SLUICE_BOTH, BOTH_FACTS)
    assert "| bridge | 3 | 4 | 7 | UP (1) | at least 3 poles, proved minimum |\n" in text
    assert "\nThe bridge saves 1 pole on the ladder.\n" in text
    assert text.count("### As built, row by row") == 2


def test_an_interrupted_search_is_told_in_the_report() -> None:
    said = "The search was stopped early."
    assert said not in report(SLUICE_RESULT, [SLUICE_FACTS])
    stopped = dataclasses.replace(SLUICE_RESULT, interrupted=True)
    assert said in report(stopped, [SLUICE_FACTS])


def test_repeaters_are_listed_with_the_relay_they_follow() -> None:
    """DOWN's second pole moved to a repeater of it."""
    network = dataclasses.replace(
        SLUICE_NETWORK,
        relays=("UP", "DOWN", "FLOOD", "DOWN_2"),
        poles=(
            *(p for p in SLUICE_NETWORK.poles if (p.relay, p.number) != ("DOWN", 2)),
            Pole("DOWN_2", 1, "n3", "n4"),
        ),
    )
    design = dataclasses.replace(SLUICE_DESIGN, network=network)
    result = Result(SLUICE_JOB, (design,), network.relays, {"DOWN_2": "DOWN"})
    known = facts(design, result.repeaters)
    assert known.tables == SLUICE_FACTS.tables
    text = report(result, [known])
    assert "| DOWN\\_2 | 1 | 1 | 0 | 0 | 2 | none | DOWN |\n" in text
    rows = text.split("### As built, row by row")[1]
    assert "| row | UP | DOWN | FLOOD | LAMP | HORN |" in rows
    assert rows.count("\n| ") == 10  # two lines of heading and the 8 rows of the job's own relays
