"""Add-ons of choices on the command line: asked, printed, and checked from what was printed."""

from __future__ import annotations

import json
import re
import sys
from dataclasses import replace
from pathlib import Path
from typing import Any

import nearchord
import numpy as np
import pytest
from add_on_answers import choice_answer
from nearchord.cli.record import show
from nearchord.cli.subject import Subject
from nearchord.question import Choice
from unit.cli.conftest import FakeService

HOUSE = """source,target
ash,birch
birch,cedar
cedar,date
date,ash
ash,elm
birch,elm
"""
WEIGHTS = [3, 1, 4, 1, 2]
SCENARIOS = "request,Dry year,wet year\nash,3,1\nbirch,1,5\ncedar,4,1\ndate,1,5\nelm,2,1\n"
ASK = ("--question", "independent-set")
EVERYTHING = ("--prices", "--conflict-prices", "--best", "4", "--count")


@pytest.fixture
def house(tmp_path: Path) -> Path:
    """A roof on a square, with weights beside it."""
    (tmp_path / "weights").write_text("\n".join(map(str, WEIGHTS)), encoding="utf-8")
    (tmp_path / "scenarios.csv").write_text(SCENARIOS, encoding="utf-8")
    file = tmp_path / "house.csv"
    file.write_text(HOUSE, encoding="utf-8")
    return file


def graph_in(file: Path) -> nearchord.Graph:
    return nearchord.Graph.read(file, weights=file.parent / "weights")


def ask(service: FakeService, command: Any, file: Path, asked: Choice, *options: str, **changes: Any) -> Any:
    """Ask about the house when the right answer to `asked` is ready."""
    service.answers = [choice_answer(graph_in(file), asked, **changes)]
    weights = () if "--scenarios" in options else ("--weights", str(file.parent / "weights"))
    return command("solve", str(file), "--question", asked.name, *weights, *options)


BESIDE = nearchord.IndependentSet(prices=True, conflict_prices=True, best=4, count=True)
YEARS = [[3, 1, 4, 1, 2], [1, 5, 1, 5, 1]]


@pytest.mark.parametrize(
    ("question", "options", "asked"),
    [
        ("independent-set", EVERYTHING, BESIDE),
        ("independent-set", ("--limit", "0"), nearchord.IndependentSet(limit=0)),
        ("independent-set", ("--best", "2", "--must", "ash"), nearchord.IndependentSet(best=2, must=["ash"])),
        ("colourable-subgraph", ("--prices", "-q", "3"), nearchord.ColourableSubgraph(colours=3, prices=True)),
        ("induced-forest", ("--prices",), nearchord.InducedForest(prices=True)),
    ],
)
def test_options_become_the_question(
    service: FakeService, nearchord_command: Any, house: Path, question: str, options: tuple[str, ...], asked: Choice
) -> None:
    for command in ("solve", "submit"):
        assert nearchord_command(command, str(house), "--question", question, *options).code == 0
    assert [submitted for _, submitted, _ in service.submitted] == [asked, asked]
    nearchord_command("batch", str(house), "--question", question, *options)
    assert service.batches[0][0].question == asked


@pytest.mark.parametrize("command", ["solve", "submit", "batch"])
def test_scenarios_are_read_by_name(service: FakeService, nearchord_command: Any, house: Path, command: str) -> None:
    """Whatever the order of the rows."""
    mixed = house.parent / "mixed.csv"
    head, *rows = SCENARIOS.splitlines()
    mixed.write_text("\n".join([head, *reversed(rows)]), encoding="utf-8")
    nearchord_command(command, str(house), *ASK, "--scenarios", str(mixed))
    submitted = service.batches[0][0].question if command == "batch" else service.submitted[0][1]
    assert submitted.vectors is not None
    assert submitted.vectors.tolist() == YEARS


@pytest.mark.parametrize(
    ("option", "question", "instead"),
    [
        (("--prices",), "clique", "leave it out, or ask independent-set, colourable-subgraph or induced-forest"),
        (("--conflict-prices",), "induced-forest", "leave it out, or ask independent-set"),
        (("--best", "0"), "vertex-cover", "leave it out, or ask independent-set"),
        (("--count",), "fill", "leave it out, or ask independent-set"),
        (("--limit", "0"), "colouring", "leave it out, or ask independent-set"),
        (("--scenarios", "x"), "structure", "ask independent-set, colourable-subgraph or induced-forest"),
        (("--demands", "x"), "independent-set", "leave it out, or ask colouring or fractional-colouring"),
        (("--weights", "x"), "colouring", "give what each vertex needs: --demands FILE"),
        (("--must", "ash"), "fractional-colouring", "leave it out, or ask independent-set, vertex-cover, clique"),
        (("-q", "3"), "colouring", "leave it out, or ask colourable-subgraph"),
    ],
)
def test_options_of_other_questions_are_refused(
    service: FakeService, nearchord_command: Any, house: Path, option: tuple[str, ...], question: str, instead: str
) -> None:
    """The message says which questions they fit."""
    ran = nearchord_command("solve", str(house), "--question", question, *option)
    assert (ran.code, ran.out, service.submitted) == (2, "", [])
    assert f"{option[0]} does not go with the question {question}" in ran.err
    assert instead in ran.err


@pytest.mark.parametrize(
    ("options", "words"),
    [
        (("--limit", "3", "--prices"), "limit stands beside prices, but goes with pins only"),
        (("--limit", "-1"), "limit is -1; give a whole number from 0"),
        (("--best", "1001"), "best is 1001; give a whole number from 0 to 1000"),
        (("--best", "many"), "many"),
        (("--scenarios", "{years}", "--count"), "scenarios stands beside count, but goes with pins only"),
        (("--scenarios", "{years}", "--weights", "{weights}"), "--scenarios and --weights both give weights"),
        (
            ("--scenarios", "{weights}"),
            "the header has no scenario; give a column of names, then one column a",
        ),
        (("--scenarios", "{house}"), "line 2: weight 'birch' is not a number"),
        (("--scenarios", "missing.csv"), "missing.csv: there is no such file"),
    ],
)
def test_wrong_add_ons_are_named(
    service: FakeService, nearchord_command: Any, house: Path, options: tuple[str, ...], words: str
) -> None:
    places = {"years": house.parent / "scenarios.csv", "weights": house.parent / "weights", "house": house}
    ran = nearchord_command("solve", str(house), *ASK, *(option.format(**places) for option in options))
    assert (ran.code, service.submitted) == (2, [])
    assert words in ran.err


def test_json_has_a_key_for_each_add_on(service: FakeService, nearchord_command: Any, house: Path) -> None:
    found = json.loads(ask(service, nearchord_command, house, BESIDE, *EVERYTHING, "--json").out)
    assert found["price_in"] == {"ash": 0, "birch": 5, "cedar": 0, "date": 4, "elm": 1}
    assert found["price_out"] == {"ash": 1, "birch": 0, "cedar": 4, "date": 0, "elm": 0}
    assert found["conflict_prices"][:3] == [["ash", "birch", 0], ["ash", "date", 0], ["ash", "elm", 2]]
    assert len(found["conflict_prices"]) == 6
    assert found["best"][:2] == [{"value": 7, "chosen": ["ash", "cedar"]}, {"value": 6, "chosen": ["cedar", "elm"]}]
    assert (len(found["best"]), found["count"]) == (4, 1)
    assert found["add_ons"] == {"prices": True, "conflict_prices": True, "best": 4, "count": True}


def test_what_was_not_asked_for_has_no_key(service: FakeService, nearchord_command: Any, house: Path) -> None:
    """And what was asked for but not reached is null."""
    keys = {"price_in", "price_out", "conflict_prices", "best", "count", "scenarios", "add_ons"}
    plain = json.loads(ask(service, nearchord_command, house, nearchord.IndependentSet(), "--json").out)
    assert not keys & set(plain)
    ran = ask(service, nearchord_command, house, BESIDE, *EVERYTHING, "--json", columns={}, count=None)
    found = json.loads(ran.out)
    assert {found[key] for key in keys & set(found) - {"add_ons"}} == {None}
    limited = nearchord.IndependentSet(limit=0)
    found = json.loads(ask(service, nearchord_command, house, limited, "--limit", "0", "--json").out)
    assert found["add_ons"] == {"limit": 0}


def test_an_impossible_price_is_null(service: FakeService, nearchord_command: Any, house: Path) -> None:
    asked = nearchord.IndependentSet(must=[0], prices=True)
    found = json.loads(ask(service, nearchord_command, house, asked, "--must", "ash", "--prices", "--json").out)
    assert (found["price_in"]["birch"], found["price_out"]["ash"]) == (None, None)


def test_json_of_scenarios_has_their_titles(service: FakeService, nearchord_command: Any, house: Path) -> None:
    asked = nearchord.ColourableSubgraph(scenarios=YEARS)
    options = ("--scenarios", str(house.parent / "scenarios.csv"))
    dry, wet = json.loads(ask(service, nearchord_command, house, asked, *options, "--json").out)["scenarios"]
    assert (dry["scenario"], dry["value"], dry["bound"]) == ("Dry year", 10, 10)
    assert (wet["scenario"], wet["value"], wet["chosen"]) == ("wet year", 12, ["ash", "birch", "cedar", "date"])
    assert set(wet["colour"]) == set(wet["chosen"])
    later = json.loads(nearchord_command("answer", "1" * 32, "--json").out)["scenarios"]
    assert [one["scenario"] for one in later] == ["1", "2"]


ASKED = [
    (BESIDE, EVERYTHING),
    (nearchord.IndependentSet(limit=1), ("--limit", "1")),
    (nearchord.IndependentSet(must=[1], never=[3], prices=True), ("--must", "birch", "--never", "date", "--prices")),
    (nearchord.ColourableSubgraph(prices=True, colours=1), ("--prices", "-q", "1")),
    (nearchord.InducedForest(scenarios=YEARS), ("--scenarios", "{years}")),
    (nearchord.ColourableSubgraph(scenarios=YEARS), ("--scenarios", "{years}")),
]


@pytest.mark.parametrize(("asked", "options"), ASKED, ids=str)
def test_what_was_printed_can_be_checked(
    service: FakeService, nearchord_command: Any, house: Path, asked: Choice, options: tuple[str, ...]
) -> None:
    """The command line confirms as much as the library does from the answer itself."""
    told = [option.format(years=house.parent / "scenarios.csv") for option in options]
    ran = ask(service, nearchord_command, house, asked, *told, "--json")
    file = house.parent / "answer.json"
    file.write_text(ran.out, encoding="utf-8")
    numbers = told if "--scenarios" in told else ("--weights", str(house.parent / "weights"))
    ran = nearchord_command("check", str(house), str(file), *numbers)
    confirmed = nearchord.check(graph_in(house), choice_answer(graph_in(house), asked), question=asked)
    lines = [line.partition(": ")[2] for line in ran.out.splitlines()]
    assert lines[: len(confirmed.what)] == list(confirmed.what)
    assert len(lines) == len(confirmed.what) + len(confirmed.not_confirmed)
    assert ran.code == (1 if confirmed.not_confirmed else 0)


def changed(file: Path, **changes: Any) -> str:
    """The answer to everything with some keys changed."""
    found = json.loads(file.read_text(encoding="utf-8"))
    file.write_text(json.dumps({**found, **changes}), encoding="utf-8")
    return str(file)


@pytest.mark.parametrize(
    ("changes", "code", "words"),
    [
        (
            {"price_in": {"ash": 0, "birch": 9, "cedar": 0, "date": 5, "elm": 1}},
            1,
            "vertex birch costs more to take in",
        ),
        ({"price_in": {"ash": 0, "cedar": 0}}, 1, "vertex birch may be chosen, but has no price in"),
        ({"price_in": {"oak": 0}}, 2, "names 'oak', which the graph does not have"),
        ({"price_in": [1]}, 2, '"price_in, price_out or conflict_prices" cannot be read'),
        ({"price_out": {"ash": "much"}}, 2, "cannot be read"),
        ({"price_out": {"ash": 2**70}}, 2, "cannot be read"),
        ({"conflict_prices": [["ash", "cedar", 1]]}, 2, "'ash' and 'cedar' are in no conflict"),
        ({"conflict_prices": [["ash", "birch"]]}, 2, "cannot be read"),
        ({"best": [{"value": 7, "chosen": ["ash", "birch"]}]}, 1, "the first of the best sets is not the choice"),
        ({"best": 7}, 2, '"best or scenarios" cannot be read'),
        ({"verdict": "BOUNDED", "bound": "17/2"}, 1, "the bound is given as 17/2, but weights are whole numbers"),
        ({"best": [{"chosen": []}]}, 2, '"best or scenarios" cannot be read'),
        ({"count": 3}, 1, "the number of best sets is not the 1 of greatest value"),
        ({"count": "x"}, 2, '"count" cannot be read'),
        ({"add_ons": {"prices": "maybe"}}, 2, "prices is 'maybe'"),
        ({"add_ons": {"best": 10**6}}, 2, "best is 1000000"),
    ],
)
def test_faults_in_what_was_printed_are_named(
    service: FakeService, nearchord_command: Any, house: Path, changes: dict[str, Any], code: int, words: str
) -> None:
    """2 where it cannot be read, 1 where it is wrong."""
    file = house.parent / "answer.json"
    file.write_text(ask(service, nearchord_command, house, BESIDE, *EVERYTHING, "--json").out, encoding="utf-8")
    weights = ("--weights", str(house.parent / "weights"))
    ran = nearchord_command("check", str(house), changed(file, **changes), *weights)
    assert (ran.code, ran.out) == (code, "")
    assert words in ran.err


def test_scenarios_have_to_be_given_to_check_them(service: FakeService, nearchord_command: Any, house: Path) -> None:
    file = house.parent / "answer.json"
    years = ("--scenarios", str(house.parent / "scenarios.csv"))
    ran = ask(service, nearchord_command, house, nearchord.InducedForest(scenarios=YEARS), *years, "--json")
    file.write_text(ran.out, encoding="utf-8")
    ran = nearchord_command("check", str(house), str(file))
    assert ran.code == 2
    assert "the answer is about scenarios, which it does not carry; name their file: --scenarios FILE" in ran.err
    ran = nearchord_command("check", str(house), str(file), *years, "--demands", str(house.parent / "weights"))
    assert "--demands does not go with the question induced-forest" in ran.err


@pytest.mark.parametrize("digits", [30, 4_300, 4_301, 100_000])
def test_a_count_of_any_length_is_printed_and_read_again(
    service: FakeService, nearchord_command: Any, house: Path, digits: int
) -> None:
    """As text where readers of JSON would refuse the number."""
    count = 10 ** (digits - 1) + 7
    asked = nearchord.IndependentSet(count=True)
    ran = ask(service, nearchord_command, house, asked, "--count", "--json", count=count)
    found = json.loads(ran.out)
    assert isinstance(found["count"], int if digits <= 4_300 else str)
    assert len(str(found["count"])) == digits
    file = house.parent / "answer.json"
    file.write_text(ran.out, encoding="utf-8")
    ran = nearchord_command("check", str(house), str(file), "--weights", str(house.parent / "weights"))
    assert (ran.code, ran.err) == (1, "")
    people = ask(service, nearchord_command, house, asked, "--count", count=count).out
    assert "different sets have this value" in people


def test_people_get_one_line_a_set_and_the_dearest_vertices(
    service: FakeService, nearchord_command: Any, house: Path
) -> None:
    ran = ask(service, nearchord_command, house, BESIDE, *EVERYTHING)
    figures, *tables = ran.out.split("\n\n")
    assert "count    this is the only set of this value" in figures.splitlines()
    assert [table.splitlines()[:3] for table in tables] == [
        ["set  value  vertices  names", "  1      7         2  ash cedar", "  2      6         2  cedar elm"],
        ["dearest  to         costs", "birch    take in        5", "cedar    leave out      4"],
        ["drop conflict  with  gains", "ash            elm       2"],
    ]


def test_people_get_one_line_a_scenario(service: FakeService, nearchord_command: Any, house: Path) -> None:
    years = ("--scenarios", str(house.parent / "scenarios.csv"))
    ran = ask(service, nearchord_command, house, nearchord.IndependentSet(scenarios=YEARS), *years)
    figures, table = ran.out.split("\n\n")
    assert "value    7, in the first scenario (nothing better exists)" in figures.splitlines()
    assert table.splitlines() == [
        "scenario  value  at most  vertices  names",
        "Dry year      7        7         2  ash cedar",
        "wet year     10       10         2  birch date",
    ]


def test_a_limit_is_said(service: FakeService, nearchord_command: Any, house: Path) -> None:
    ran = ask(service, nearchord_command, house, nearchord.IndependentSet(limit=1), "--limit", "1")
    assert "chosen   1 of 5 vertices, 1 at most" in ran.out.splitlines()


@pytest.mark.parametrize("columns", [80, 120])
def test_tables_fit_the_terminal_and_do_not_flood_it(
    monkeypatch: pytest.MonkeyPatch, capsys: Any, columns: int
) -> None:
    """Twenty sets, ten vertices, ten conflicts, and how many more."""
    n = 200
    names = [f"request-{v:05}" for v in range(n)]
    graph = nearchord.Graph.from_edges(n, [(v, v + 1) for v in range(n - 1)], names=names)
    chosen = np.arange(0, n, 2, dtype=np.uint32)
    answer = choice_answer(nearchord.Graph.from_edges(0, []), BESIDE)
    answer = replace(
        answer,
        vertices=n,
        chosen=chosen,
        value=100,
        bound=100,
        columns={
            "best_value": np.full(50, 100),
            "best_start": np.arange(51) * chosen.size,
            "best_chosen": np.tile(chosen, 50),
            "price_in": np.arange(n) % 2,
            "price_out": 1 - np.arange(n) % 2,
            "conflict_price": np.ones(graph.m, np.int64),
        },
    )
    monkeypatch.setenv("COLUMNS", str(columns))
    monkeypatch.setattr(sys.stdout, "isatty", lambda: True)
    show(answer, Subject.of(graph))
    lines = re.sub(r"\x1b\[[0-9]*m", "", capsys.readouterr().out).splitlines()
    assert max(map(len, lines)) <= columns
    assert [line for line in lines if line.startswith("...")] == [
        "... and 30 more (--json has all)",
        "... and 190 more (--json has all)",
        "... and 189 more (--json has all)",
    ]


def test_prices_of_conflicts_are_named_for_a_job_of_before(
    service: FakeService, nearchord_command: Any, house: Path
) -> None:
    """Their order is that of the stored graph."""
    graph = graph_in(house)
    asked = nearchord.IndependentSet(conflict_prices=True)
    service.answers = [replace(choice_answer(graph, asked), names_address="n" * 64)]
    service.graphs[graph.address] = graph.with_names(None)
    service.names_stored = graph.names or ()
    found = json.loads(nearchord_command("answer", "1" * 32, "--json").out)
    assert found["conflict_prices"][1:3] == [["ash", "date", 0], ["ash", "elm", 2]]
