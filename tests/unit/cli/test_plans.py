"""Plans for everybody on the command line: demands read, plans printed, and checked from what was printed."""

from __future__ import annotations

import json
import re
import sys
from dataclasses import replace
from fractions import Fraction
from pathlib import Path
from typing import Any

import nearchord
import numpy as np
import pytest
from nearchord.cli import proof_file
from nearchord.cli.answers.plan import lines
from nearchord.cli.record import record, show
from nearchord.cli.recorded import load
from nearchord.cli.subject import Subject
from nearchord.question import Plan
from nearchord.session.content import weight_content
from unit.cli.conftest import FakeService, make_answer

NAMES = ("ash", "birch", "cedar", "date", "elm")
RING = nearchord.Graph.from_edges(5, [(0, 1), (1, 2), (2, 3), (3, 4), (0, 4)], names=NAMES)
DEMANDS = (2, 1, 0, 1, 1)


@pytest.fixture
def ring(tmp_path: Path) -> Path:
    """Five vertices in a ring, the numbers that they demand, and the same by name."""
    (tmp_path / "demands").write_text("\n".join(map(str, DEMANDS)), encoding="utf-8")
    rows = [f"{name},{demand}" for name, demand in zip(NAMES, DEMANDS, strict=True)]
    (tmp_path / "demands.csv").write_text("\n".join(["name,demand", *reversed(rows)]), encoding="utf-8")
    file = tmp_path / "ring.csv"
    file.write_text("source,target\nash,birch\nbirch,cedar\ncedar,date\ndate,elm\nelm,ash\n", encoding="utf-8")
    return file


def column(values: Any, kind: type[np.generic] = np.int64) -> np.ndarray:
    return np.array(values, kind)


def plan_answer(question: Plan, value: int | Fraction, columns: dict[str, Any], weights: str = "") -> nearchord.Answer:
    """A plan for the ring that is as short as its bound."""
    answer = make_answer(question=question, value=value, bound=value, chosen=column([], np.uint32), vertices=5)
    origin = replace(answer.provenance, graph_address=RING.address, weights_address=weights, proof_format=1)
    return replace(answer, columns=columns, provenance=origin, proof=nearchord.ProofKind.CERTIFICATE, proof_kinds=())


CHANNELS = plan_answer(nearchord.Colouring(), 3, {"colour": column([1, 2, 1, 2, 3], np.uint32)})
SHARES = {
    "share_start": column([0, 2, 4, 6, 8, 10]),
    "share_vertex": column([0, 2, 1, 3, 2, 4, 0, 3, 1, 4], np.uint32),
    "share_numerator": column([1] * 5),
    "share_denominator": column([2]),
    "bottleneck_numerator": column([1] * 5),
    "bottleneck_denominator": column([2]),
}
BAGS = {
    "proof_clique_start": column([0]),
    "proof_clique_vertex": column([], np.uint32),
    "proof_clique_weight": column([]),
    "proof_bag_start": column([0, 5]),
    "proof_bag_vertex": column(range(5), np.uint32),
    "proof_bag_adhesion": column([0]),
    "proof_bag_above": column([-1]),
    "proof_home_weight": column([1] * 5),
}
FRAME = plan_answer(nearchord.FractionalColouring(), Fraction(5, 2), {**SHARES, **BAGS})


def demanding() -> nearchord.Answer:
    """Colours for the demands: two for ash, none for cedar."""
    columns = {
        "colour": column([1, 2, 3, 1, 3], np.uint32),
        "colour_start": column([0, 2, 3, 3, 4, 5]),
    }
    return plan_answer(nearchord.Colouring(), 3, columns, weight_content(column(DEMANDS)).address)


@pytest.mark.parametrize("question", ["colouring", "fractional-colouring"])
@pytest.mark.parametrize("name", ["demands", "demands.csv"])
@pytest.mark.parametrize("command", ["solve", "submit", "batch"])
def test_demands_are_read(
    service: FakeService, nearchord_command: Any, ring: Path, command: str, name: str, question: str
) -> None:
    """In the order of the vertices, or by name."""
    service.answers = [CHANNELS if question == "colouring" else FRAME]
    ran = nearchord_command(command, str(ring), "--question", question, "--demands", str(ring.parent / name))
    assert ran.code == 0, ran.err
    submitted = service.batches[0][0].question if command == "batch" else service.submitted[0][1]
    assert submitted.name == question
    assert submitted.vectors is not None
    assert submitted.vectors.tolist() == list(DEMANDS)


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("1\n-2\n", "line 2: demand -2 is negative; give demands of at least 0"),
        ("1\n2\n", "there are 2 demands, but the graph has 5 vertices"),
        ("1\n1\n1\n1\n0.5\n", "line 5: demand 0.5 is not a whole number; multiply all demands: scale=10"),
        (f"{2**61}\n" * 5, "the demands add up to 2^62 or more"),
        ("name,demand\nash,1\nash,2\n", "line 3: 'ash' has a demand already"),
        ("name,demand\nash,1\n", "vertex 'birch' has no demand; add a row for it: birch,1"),
        ("name,load\nash,1\n", "the header has 0 columns called 'weight'"),
    ],
)
def test_wrong_demands_are_named(
    service: FakeService, nearchord_command: Any, ring: Path, text: str, words: str
) -> None:
    file = ring.parent / "wrong"
    file.write_text(text, encoding="utf-8")
    ran = nearchord_command("solve", str(ring), "--question", "colouring", "--demands", str(file))
    assert (ran.code, service.submitted) == (2, [])
    assert words in ran.err


def solved(service: FakeService, command: Any, file: Path, answer: nearchord.Answer, *options: str) -> Any:
    service.answers = [answer]
    return command("solve", str(file), "--question", answer.question.name, *options)


def test_json_of_a_colouring_has_the_colours_by_name(service: FakeService, nearchord_command: Any, ring: Path) -> None:
    """One number a vertex, or with demands a list."""
    found = json.loads(solved(service, nearchord_command, ring, CHANNELS, "--json").out)
    assert found["colour"] == {"ash": 1, "birch": 2, "cedar": 1, "date": 2, "elm": 3}
    assert (found["value"], found["chosen"], found["bottleneck"]) == (3, [], None)
    demands = ("--demands", str(ring.parent / "demands"))
    found = json.loads(solved(service, nearchord_command, ring, demanding(), "--json", *demands).out)
    assert found["colour"] == {"ash": [1, 2], "birch": [3], "cedar": [], "date": [1], "elm": [3]}


def test_json_of_a_frame_has_shares_and_bottleneck(service: FakeService, nearchord_command: Any, ring: Path) -> None:
    found = json.loads(solved(service, nearchord_command, ring, FRAME, "--json").out)
    assert (found["value"], found["bound"]) == ("5/2", "5/2")
    assert found["shares"][:2] == [
        {"share": "1/2", "chosen": ["ash", "cedar"]},
        {"share": "1/2", "chosen": ["birch", "date"]},
    ]
    assert found["bottleneck"] == dict.fromkeys(NAMES, "1/2")


@pytest.mark.parametrize(("answer", "keys"), [(CHANNELS, {"colour"}), (FRAME, {"shares"})], ids=["colours", "shares"])
def test_keys_of_what_was_not_reached_are_null(answer: nearchord.Answer, keys: set[str]) -> None:
    """A job that was cancelled has no plan."""
    ended = replace(answer, verdict=nearchord.Verdict.CANCELLED, value=None, bound=None, columns={})
    found = record(ended, Subject.of(RING))
    assert {found[key] for key in keys | {"bottleneck"}} == {None}


def test_people_get_one_line_a_colour(service: FakeService, nearchord_command: Any, ring: Path) -> None:
    told = solved(service, nearchord_command, ring, CHANNELS).out.splitlines()
    assert "colours  3 (no fewer suffice)" in told
    assert told[-3:] == ["colour 1 ash cedar", "colour 2 birch date", "colour 3 elm"]
    demands = ("--demands", str(ring.parent / "demands"))
    told = solved(service, nearchord_command, ring, demanding(), *demands).out.splitlines()
    assert told[-3:] == ["colour 1 ash date", "colour 2 ash", "colour 3 birch elm"]


def test_people_get_one_line_a_share_and_the_bottleneck(
    service: FakeService, nearchord_command: Any, ring: Path
) -> None:
    figures, shares, bottleneck = solved(service, nearchord_command, ring, FRAME).out.split("\n\n")
    assert "frame    5/2, 5 sets take turns (no shorter frame exists)" in figures.splitlines()
    assert shares.splitlines()[:2] == ["share  vertices  names", "  1/2         2  ash cedar"]
    assert bottleneck.splitlines()[:2] == ["bottleneck  price", "ash           1/2"]


def test_people_are_told_how_far_a_plan_may_be_from_the_shortest() -> None:
    """In both questions."""
    open_ends = {"verdict": nearchord.Verdict.BOUNDED}
    assert dict(lines(replace(CHANNELS, bound=2, **open_ends)))["colours"] == "3 (at least 2 are needed)"
    (frame,) = (text for name, text in lines(replace(FRAME, bound=2, **open_ends)) if name == "frame")
    assert frame == "5/2, 5 sets take turns (at least 2 is needed)"


@pytest.mark.parametrize("columns", [80, 120])
def test_plans_fit_the_terminal_and_do_not_flood_it(monkeypatch: pytest.MonkeyPatch, capsys: Any, columns: int) -> None:
    """A plan with many colours, and one with many shares."""
    n = 600
    graph = nearchord.Graph.from_edges(n, [], names=[f"request-{v:05}" for v in range(n)])
    colours = replace(CHANNELS, vertices=n, columns={"colour": column(np.arange(n) % 30 + 1, np.uint32)})
    shares = {
        "share_start": np.arange(31) * 20,
        "share_vertex": np.arange(n, dtype=np.uint32),
        "share_numerator": column(range(1, 31)),
        "share_denominator": column([7]),
        "bottleneck_numerator": column(range(n)),
        "bottleneck_denominator": column([n]),
    }
    monkeypatch.setenv("COLUMNS", str(columns))
    monkeypatch.setattr(sys.stdout, "isatty", lambda: True)
    for answer in (colours, replace(FRAME, vertices=n, columns=shares)):
        show(answer, Subject.of(graph))
    told = re.sub(r"\x1b\[[0-9]*m", "", capsys.readouterr().out).splitlines()
    assert max(map(len, told)) <= columns
    assert "colour 9  request-00008 request-00038" in " ".join(told)
    assert [line.strip() for line in told if re.match(r" *\.\.\. and \d+ more .*", line)][-3:] == [
        "... and 10 more colours (--json has all)",
        "... and 10 more (--json has all)",
        "... and 589 more (--json has all)",
    ]


@pytest.mark.parametrize(
    ("answer", "options"),
    [(CHANNELS, ()), (FRAME, ()), (None, ("--demands", "{demands}"))],
    ids=["colours", "shares", "demands"],
)
def test_what_was_printed_can_be_checked(
    service: FakeService,
    nearchord_command: Any,
    ring: Path,
    answer: nearchord.Answer | None,
    options: tuple[str, ...],
) -> None:
    """The plan is confirmed; the bound takes the proof."""
    told = [option.format(demands=ring.parent / "demands") for option in options]
    file = ring.parent / "answer.json"
    file.write_text(solved(service, nearchord_command, ring, answer or demanding(), "--json", *told).out)
    ran = nearchord_command("check", str(ring), str(file), *told)
    assert ran.err == ""
    assert ran.out.splitlines()[0].startswith("confirmed: ")
    assert "not confirmed: the bound" in ran.out
    assert ran.code == 1


def test_the_proof_of_a_frame_goes_through_files(service: FakeService, nearchord_command: Any, ring: Path) -> None:
    """With its prices, whose numerators the weights of the proof cover."""
    doubled = {**FRAME.columns, **{name: FRAME.columns[name] * 2 for name in SHARES if name.startswith("bottleneck")}}
    doubled["proof_home_weight"] = doubled["proof_home_weight"] * 2
    file, proof = ring.parent / "answer.json", ring.parent / "proof"
    answer = replace(FRAME, columns=doubled)
    file.write_text(solved(service, nearchord_command, ring, answer, "--json", "--proof", str(proof)).out)
    ran = nearchord_command("check", str(ring), str(file), "--proof", str(proof))
    assert (ran.code, ran.err) == (0, "")
    assert "confirmed: the bound 5/2: the demands are worth 5/2, no independent set more than 1" in ran.out


def test_demands_have_to_be_given_to_check_them(service: FakeService, nearchord_command: Any, ring: Path) -> None:
    file, demands = ring.parent / "answer.json", str(ring.parent / "demands")
    ran = solved(service, nearchord_command, ring, demanding(), "--json", "--demands", demands)
    file.write_text(ran.out)
    ran = nearchord_command("check", str(ring), str(file))
    assert ran.code == 2
    assert "the answer is about demands, which it does not carry; name their file: --demands FILE" in ran.err
    (ring.parent / "others").write_text("1\n1\n1\n1\n2\n")
    ran = nearchord_command("check", str(ring), str(file), "--demands", str(ring.parent / "others"))
    assert ran.code == 1
    assert "the answer is about the demands" in ran.err


@pytest.mark.parametrize(
    ("answer", "changes", "code", "words"),
    [
        (CHANNELS, {"colour": {**dict.fromkeys(NAMES, 1)}}, 1, "the value is given as 3"),
        (CHANNELS, {"colour": {"ash": 1}}, 2, "1 of 5 vertices have a colour"),
        (CHANNELS, {"colour": {**dict.fromkeys(NAMES, "red")}}, 2, "cannot be read"),
        (CHANNELS, {"colour": [1, 2]}, 2, "cannot be read"),
        (FRAME, {"shares": [{"share": "1/0", "chosen": []}]}, 2, "cannot be read"),
        (FRAME, {"shares": [{"share": "5/2", "chosen": ["ash"]}]}, 1, "birch"),
        (FRAME, {"shares": [{"share": f"1/{2**70}", "chosen": ["ash"]}]}, 2, "cannot be read"),
        (FRAME, {"bottleneck": {"oak": "1/2"}}, 2, "names 'oak', which the graph does not have"),
        (FRAME, {"bottleneck": "1/2"}, 2, "cannot be read"),
    ],
)
def test_faults_in_what_was_printed_are_named(
    nearchord_command: Any, ring: Path, answer: nearchord.Answer, changes: dict[str, Any], code: int, words: str
) -> None:
    """2 where it cannot be read, 1 where it is wrong."""
    file = ring.parent / "answer.json"
    file.write_text(json.dumps({**record(answer, Subject.of(RING)), **changes}))
    ran = nearchord_command("check", str(ring), str(file))
    assert (ran.code, ran.out) == (code, "")
    assert words in ran.err


def test_what_was_printed_is_read_back_to_the_number(ring: Path) -> None:
    """Colours, shares and prices, in lowest terms."""
    for answer in (CHANNELS, FRAME):
        file = ring.parent / "answer.json"
        file.write_text(json.dumps(record(answer, Subject.of(RING))))
        back = load(str(file), RING)
        assert [back.colours_of(v) for v in range(5)] == [answer.colours_of(v) for v in range(5)]
        assert [(share, of.tolist()) for share, of in back.shares] == [(s, of.tolist()) for s, of in answer.shares]
        assert back.bottleneck == answer.bottleneck


def test_a_proof_needs_more_than_prices(tmp_path: Path) -> None:
    """Prices alone prove nothing."""
    assert not proof_file.write(str(tmp_path / "proof"), replace(FRAME, columns=SHARES))
