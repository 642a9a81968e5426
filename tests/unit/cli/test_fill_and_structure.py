"""The questions about the graph alone on the command line: asked, printed, and checked from what was printed."""

from __future__ import annotations

import json
import sys
from dataclasses import replace
from pathlib import Path
from typing import Any

import nearchord
import networkx as nx
import numpy as np
import pytest
from fill_answers import fill_answer, provenance, vertices
from nearchord.cli.answers import fill as fill_lines
from nearchord.cli.names import Labels
from nearchord.cli.numbers import size
from unit.cli.conftest import FakeService, make_answer

STRUCTURE = nearchord.StructureReport(
    components=2,
    largest_core=4,
    predictions=(
        nearchord.Prediction("independent-set", 0, 12, at_least=False, memory_bytes=2**21, fits=True),
        nearchord.Prediction("colourable-subgraph", 2, 20_101, at_least=False, memory_bytes=900, fits=True),
        nearchord.Prediction("colourable-subgraph", 3, 10**7, at_least=True, memory_bytes=3 * 2**30, fits=False),
        nearchord.Prediction("induced-forest", 0, 99, at_least=False, memory_bytes=2048, fits=True),
    ),
)


def ask(service: FakeService, command: Any, file: Path, answer: nearchord.Answer, *options: str) -> Any:
    """Ask the question of a prepared answer."""
    service.answers = [answer]
    return command("solve", str(file), "--question", answer.question.name, *options)


def of(file: Path, **changes: Any) -> nearchord.Answer:
    """The fill of the graph in a file."""
    return fill_answer(nearchord.Graph.read(file), **changes)


def structure(**changes: Any) -> nearchord.Answer:
    fields = {"value": 4, "bound": 3, "fill": 4, "chosen": vertices([]), "verdict": nearchord.Verdict.BOUNDED}
    return make_answer(question=nearchord.Structure(), **{**fields, "structure": STRUCTURE, **changes})


def test_json_of_a_fill_has_the_promised_keys(service: FakeService, nearchord_command: Any, square: Path) -> None:
    """Pairs and witnesses are named as in the file."""
    ran = ask(service, nearchord_command, square, of(square), "--fill", "50", "--json")
    found = json.loads(ran.out)
    assert (ran.code, ran.err, ran.out.count("\n")) == (0, "", 1)
    assert (found["question"], found["verdict"], found["proof"]) == ("fill", "PROVEN", "certificate")
    assert (found["value"], found["bound"], found["fill"], found["fill_lower_bound"]) == (1, 1, 1, 1)
    assert found["fill_edges"] == [[2, 4]]
    assert (found["chordal"], found["interval"], found["split"], found["splittance"]) == (False, False, False, 1)
    assert found["proof_kinds"] == ["packing"]
    assert (found["chosen"], found["must"], found["never"]) == ([], [], [])
    assert found["witness"] == {
        "elimination_order": [1, 2, 3, 4],
        "chordless_cycle": [1, 2, 3, 4],
        "split_clique": None,
        "intervals": None,
        "branches": [],
        "packing": [{"ring": [[1], [2], [3], [4]], "share": 1}],
        "cores": [[1, 2, 3, 4]],
    }
    _, question, terms = service.submitted[0]
    assert (question, terms["budget"].fill) == (nearchord.Fill(), 50)


def test_json_of_a_structure_has_states_by_question(service: FakeService, nearchord_command: Any, square: Path) -> None:
    """Two colours are what is meant where none are said."""
    ran = ask(service, nearchord_command, square, structure(), "--json")
    found = json.loads(ran.out)
    assert ran.code == 0, ran.err
    assert found["states"] == {
        "independent-set": 12,
        "colourable-subgraph": 20_101,
        "colourable-subgraph q=3": 10**7,
        "induced-forest": 99,
    }
    assert (found["parts"], found["fill_cores"], found["largest_bag"], found["bags"]) == (1, 1, 3, 2)
    assert (found["components"], found["largest_core"]) == (2, 4)
    assert found["predictions"][2] == {
        "question": "colourable-subgraph",
        "colours": 3,
        "states": 10**7,
        "at_least": True,
        "memory_bytes": 3 * 2**30,
        "fits": False,
    }


def test_choices_have_none_of_these_keys(service: FakeService, nearchord_command: Any, square: Path) -> None:
    """Their object stays as it was."""
    found = json.loads(ask(service, nearchord_command, square, make_answer(), "--json").out)
    assert not {"fill_edges", "witness", "chordal", "predictions", "components"} & set(found)
    assert found["states"] == 12


def test_people_get_bounds_classes_and_the_pairs_by_name(
    service: FakeService, nearchord_command: Any, tmp_path: Path
) -> None:
    """One pair a line below the figures."""
    file = tmp_path / "square.csv"
    file.write_text("source,target\nash,birch\nbirch,cedar\ncedar,date\ndate,ash\n", encoding="utf-8")
    ran = ask(service, nearchord_command, file, of(file))
    figures, table = ran.out.split("\n\n")
    entries = dict(line.split(maxsplit=1) for line in figures.splitlines())
    assert entries["fill"] == "1 (no fewer make the graph chordal)"
    assert entries["classes"] == "not chordal, not interval, not split (splittance 1)"
    assert entries["cores"] == "1, bounded by packing (1)"
    assert entries["proof"] == "certificate"
    assert "value" not in entries
    assert [line.split() for line in table.splitlines()] == [["add", "edge", "to"], ["birch", "date"]]


@pytest.mark.parametrize(
    ("changes", "line"),
    [
        ({"verdict": nearchord.Verdict.BOUNDED, "bound": 0}, "fill     1 (at least 0 are needed)"),
        ({"verdict": nearchord.Verdict.OVER_FILL}, "fill     1 (at least 1 are needed)"),
        ({"verdict": nearchord.Verdict.OVER_FILL, "value": None, "columns": {}}, "fill     at least 1"),
        (
            {"recognition": nearchord.Recognition(True, None, False, None)},
            "classes  chordal, interval not settled, not split",
        ),
    ],
)
def test_people_are_told_what_is_open(
    service: FakeService, nearchord_command: Any, square: Path, changes: dict[str, Any], line: str
) -> None:
    """Ranges, and classes that were not settled."""
    ran = ask(service, nearchord_command, square, of(square, **changes))
    assert line in ran.out.splitlines()


def test_a_terminal_is_not_flooded_with_pairs(monkeypatch: pytest.MonkeyPatch, capsys: Any) -> None:
    """The first twenty and how many more; a file gets all."""
    pairs = vertices(v for u in range(25) for v in (u, u + 50))
    answer = replace(fill_answer(nearchord.Graph.from_edges(1, [])), columns={"fill_edge": pairs})
    fill_lines.show_pairs(answer, Labels(None))
    assert capsys.readouterr().out.count("\n") == 2 + 25
    monkeypatch.setattr(sys.stdout, "isatty", lambda: True)
    fill_lines.show_pairs(answer, Labels(None))
    *_, last, more = capsys.readouterr().out.splitlines()
    assert last.split() == ["19", "69"]
    assert more == "... and 5 more (--json has all)"


def test_people_get_the_structure_as_a_table(service: FakeService, nearchord_command: Any, square: Path) -> None:
    """What each question takes and whether it fits the budget."""
    ran = ask(service, nearchord_command, square, structure())
    figures, table = ran.out.split("\n\n")
    entries = dict(line.split(maxsplit=1) for line in figures.splitlines())
    assert entries["fill"] == "3 to 4"
    assert entries["parts"] == "1, in 2 connected components"
    assert entries["cores"] == "1, the largest with 4 vertices"
    assert entries["bags"] == "2, the largest with 3 vertices"
    assert table.splitlines() == [
        "question                        states   memory  fits",
        "independent-set                     12  2.0 MiB  yes",
        "colourable-subgraph q=2         20,101    900 B  yes",
        "colourable-subgraph q=3  >= 10,000,000  3.0 GiB  no",
        "induced-forest                      99  2.0 KiB  yes",
    ]


def test_one_component_is_told_in_the_singular(service: FakeService, nearchord_command: Any, square: Path) -> None:
    """Not "1 connected components"."""
    ran = ask(service, nearchord_command, square, structure(structure=replace(STRUCTURE, components=1)))
    assert "1, in 1 connected component" in [line.removeprefix("parts").strip() for line in ran.out.splitlines()]


@pytest.mark.parametrize(
    ("count", "words"),
    [(0, "0 B"), (1023, "1023 B"), (1024, "1.0 KiB"), (3 * 2**29, "1.5 GiB"), (2**52, "4,096.0 TiB")],
)
def test_sizes_are_in_the_largest_unit(count: int, words: str) -> None:
    assert size(count) == words


@pytest.mark.parametrize("question", ["fill", "structure"])
@pytest.mark.parametrize("option", ["--must", "--never", "--weights"])
@pytest.mark.parametrize("command", ["solve", "submit", "batch"])
def test_options_that_do_not_fit_are_refused(
    service: FakeService, nearchord_command: Any, square: Path, command: str, option: str, question: str
) -> None:
    """The message names the option, the question, and what it fits."""
    ran = nearchord_command(command, str(square), "--question", question, option, str(square))
    assert (ran.code, ran.out) == (2, "")
    assert f"{option} does not go with the question {question}" in ran.err
    assert "independent-set, vertex-cover, clique, colourable-subgraph or induced-forest" in ran.err
    assert service.submitted == []


def test_batches_have_the_keys_of_the_question(service: FakeService, nearchord_command: Any, square: Path) -> None:
    """One object a line, as for every question."""
    service.answers = [of(square)]
    ran = nearchord_command("batch", str(square), "--question", "fill")
    (line,) = map(json.loads, ran.out.splitlines())
    assert (line["file"], line["fill_edges"]) == (str(square), [[2, 4]])


def test_what_was_printed_can_be_checked(
    service: FakeService, nearchord_command: Any, tmp_path: Path, square: Path
) -> None:
    """From --json to confirmed: every graph on up to four vertices keeps all its witnesses in JSON."""
    for number, source in enumerate(g for g in nx.graph_atlas_g()[1:] if g.number_of_nodes() <= 4):
        graph = nearchord.Graph.from_edges(len(source), [tuple(sorted(edge)) for edge in source.edges])
        graph = graph.with_names([f"v{v}" for v in range(graph.n)])
        file = tmp_path / f"{number}.json"
        file.write_text(json.dumps(nx.node_link_data(graph.to_networkx(), edges="links")), encoding="utf-8")
        answer = fill_answer(nearchord.Graph.read(file))
        expected = nearchord.check(nearchord.Graph.read(file), answer)
        printed = tmp_path / "answer.json"
        printed.write_text(ask(service, nearchord_command, file, answer, "--json").out, encoding="utf-8")
        ran = nearchord_command("check", str(file), str(printed))
        assert ran.out.splitlines() == [
            *(f"confirmed: {what}" for what in expected.what),
            *(f"not confirmed: {what}" for what in expected.not_confirmed),
        ]
        assert ran.code == (1 if expected.not_confirmed else 0)


def test_a_fill_budget_that_is_too_small_is_confirmed(
    service: FakeService, nearchord_command: Any, square: Path, tmp_path: Path
) -> None:
    """The budget is in the provenance of the object; the verdict ends `solve` with 1, and `check` with 0."""
    over = of(square, verdict=nearchord.Verdict.OVER_FILL, provenance=provenance(nearchord.Graph.read(square), 0))
    printed = tmp_path / "answer.json"
    ran = ask(service, nearchord_command, square, over, "--fill", "0", "--json")
    assert ran.code == 1
    printed.write_text(ran.out, encoding="utf-8")
    checked = nearchord_command("check", str(square), str(printed))
    assert checked.code == 0, checked.out
    printed.write_text(json.dumps({**json.loads(ran.out), "provenance": {"budget": {"fill": 1}}}), encoding="utf-8")
    assert nearchord_command("check", str(square), str(printed)).code == 1


def test_a_structure_that_was_printed_is_checked_as_far_as_it_goes(
    service: FakeService, nearchord_command: Any, square: Path, tmp_path: Path
) -> None:
    """The number of components is confirmed; a wrong one is not."""
    report = replace(STRUCTURE, components=1)
    printed = tmp_path / "answer.json"
    graph = nearchord.Graph.read(square)
    answer = structure(structure=report, provenance=provenance(graph))
    printed.write_text(ask(service, nearchord_command, square, answer, "--json").out, encoding="utf-8")
    ran = nearchord_command("check", str(square), str(printed))
    assert ran.code == 1
    assert "confirmed: the graph has 1 connected component" in ran.out.splitlines()
    printed.write_text(json.dumps({**json.loads(printed.read_text()), "components": 3}), encoding="utf-8")
    ran = nearchord_command("check", str(square), str(printed))
    assert (ran.code, ran.out) == (1, "")
    assert "given as 3, but there are 1" in ran.err


@pytest.mark.parametrize(
    ("changes", "words"),
    [
        ({"fill_edges": [[1, 9]]}, ["fill_edges", "9"]),
        ({"fill_edges": [[1]]}, ["fill_edges", "pairs"]),
        ({"fill_edges": 3}, ["fill_edges", "pairs"]),
        ({"chordal": "no"}, ["chordal", "true, false, or null"]),
        ({"proof_kinds": ["hearsay"]}, ["proof_kinds", "hearsay"]),
        ({"witness": 3}, ["witness"]),
        ({"witness": {"elimination_order": [9]}}, ["witness", "9"]),
        ({"witness": {"packing": [{"ring": [[1]]}]}}, ["witness", "share"]),
        ({"witness": {"packing": [{"ring": [[1]], "share": "1/0"}]}}, ["witness"]),
        ({"witness": {"intervals": [[0, 1]]}}, ["witness", "intervals"]),
        ({"witness": {"intervals": [[1, 0]] * 4}}, ["witness", "intervals"]),
    ],
)
def test_objects_that_are_no_fill_are_bad_input(
    service: FakeService,
    nearchord_command: Any,
    square: Path,
    tmp_path: Path,
    changes: dict[str, Any],
    words: list[str],
) -> None:
    """The message names the file and the key."""
    found = json.loads(ask(service, nearchord_command, square, of(square), "--json").out)
    printed = tmp_path / "answer.json"
    printed.write_text(json.dumps({**found, **changes}), encoding="utf-8")
    ran = nearchord_command("check", str(square), str(printed))
    assert (ran.code, ran.out) == (2, "")
    assert "answer.json" in ran.err
    assert all(word in ran.err for word in words), ran.err


def test_labels_are_numbers_only_where_all_names_are() -> None:
    assert Labels(["1", "2", "10"]).of(np.array([2, 0])) == [10, 1]
    assert Labels(["1", "02"]).of([1]) == ["02"]
    assert Labels(None).of([3]) == [3]
