"""The shelf of kept structures: bounded, deletable, and never believing a file that is not as it was written."""

from __future__ import annotations

import os
import shutil
from dataclasses import replace

import nearchord_solve
import numpy as np
import pytest
from bench.generators import time_windows
from contract.executor_stage import task
from contract.scripted_solver import Script
from nearchord_service.model.content import Bytes
from nearchord_service.model.event import Phase
from nearchord_service.model.question import Question, QuestionName
from nearchord_service.work import runner
from nearchord_service.work.kept import Shelf

ARRAYS = {
    "one": np.arange(5),
    "two": np.array([7, -1], np.int32),
    "none": np.empty(0, np.int32),
    "three": np.array([1, 0, 255], np.uint8),
}
PLENTY = 10**6


def owned(owner="ann", address="a" * 64, **changes):
    return replace(task(Script.ANSWER), owner=owner, graph_address=address, **changes)


def kept(folder, one=None, arrays=None, most=PLENTY, solver="s"):
    shelf = Shelf(folder, most, solver)
    shelf.offer(one or owned(), ARRAYS if arrays is None else arrays)
    shelf.store()
    return shelf


def same(found, arrays):
    assert found is not None
    assert list(found) == list(arrays)
    for name, array in arrays.items():
        assert found[name].dtype == array.dtype
        assert found[name].tolist() == array.tolist()
        assert found[name].flags.carray
    return True


def files(folder):
    return sorted(folder.iterdir()) if folder.exists() else []


def test_what_was_kept_is_found_as_it_was(tmp_path):
    """Types, order and content; the arrays are writable and aligned, as kernels want them."""
    assert same(kept(tmp_path / "kept").find(owned()), ARRAYS)


def test_nothing_is_written_before_the_answer_has_gone(tmp_path):
    """Offering only notes."""
    shelf = Shelf(tmp_path, PLENTY, "s")
    shelf.offer(owned(), ARRAYS)
    assert files(tmp_path) == []
    shelf.store()
    assert len(files(tmp_path)) == 1
    shelf.store()
    assert len(files(tmp_path)) == 1


def test_other_graphs_owners_and_solvers_find_nothing(tmp_path):
    """Nobody learns what others have stored, and no code believes other code."""
    shelf = kept(tmp_path)
    assert shelf.find(owned(address="b" * 64)) is None
    assert shelf.find(owned(owner="bob")) is None
    assert Shelf(tmp_path, PLENTY, "t").find(owned()) is None


def test_every_damage_is_noticed(tmp_path):
    """Whichever byte is changed, and wherever the file ends."""
    shelf = kept(tmp_path)
    (path,) = files(tmp_path)
    sound = path.read_bytes()
    for at in range(len(sound)):
        path.write_bytes(sound[:at] + bytes([sound[at] ^ 1]) + sound[at + 1 :])
        assert shelf.find(owned()) is None
    for end in range(len(sound)):
        path.write_bytes(sound[:end])
        assert shelf.find(owned()) is None
    path.write_bytes(sound + b"x")
    assert shelf.find(owned()) is None
    path.write_bytes(sound)
    assert same(shelf.find(owned()), ARRAYS)


def test_a_sound_file_under_another_name_is_ignored(tmp_path):
    """It says whose it is."""
    shelf = kept(tmp_path)
    (path,) = files(tmp_path)
    kept(tmp_path, owned(address="b" * 64))
    (other,) = (file for file in files(tmp_path) if file != path)
    shutil.copy(path, other)
    assert shelf.find(owned(address="b" * 64)) is None


def test_a_damaged_file_is_replaced_by_the_next_solve(tmp_path):
    """Nothing has to be repaired by hand."""
    shelf = kept(tmp_path)
    (path,) = files(tmp_path)
    path.write_bytes(b"damaged")
    shelf.offer(owned(), ARRAYS)
    shelf.store()
    assert same(shelf.find(owned()), ARRAYS)


def test_what_was_not_used_for_longest_goes_first(tmp_path):
    """Using counts, not writing."""
    one, two, three = (owned(address=letter * 64) for letter in "123")
    kept(tmp_path, one)
    (path,) = files(tmp_path)
    most = 2 * path.stat().st_size
    kept(tmp_path, two)
    for file in files(tmp_path):
        os.utime(file, (1, 1) if file == path else (2, 2))
    shelf = Shelf(tmp_path, most, "s")
    assert shelf.find(one) is not None
    kept(tmp_path, three, most=most)
    assert shelf.find(one) is not None
    assert shelf.find(two) is None
    assert shelf.find(three) is not None


def test_what_is_larger_than_the_shelf_is_not_kept(tmp_path):
    """It would only push out everything else."""
    kept(tmp_path, most=100)
    assert files(tmp_path) == []


def test_the_folder_may_vanish_at_any_time(tmp_path):
    """It is made again."""
    folder = tmp_path / "kept"
    shelf = kept(folder)
    shutil.rmtree(folder)
    assert shelf.find(owned()) is None
    shelf.offer(owned(), ARRAYS)
    shelf.store()
    assert same(shelf.find(owned()), ARRAYS)


def test_a_folder_that_cannot_be_written_harms_nothing(tmp_path):
    """A file stands where the folder should be."""
    blocked = tmp_path / "kept"
    blocked.write_text("in the way")
    shelf = kept(blocked)
    assert shelf.find(owned()) is None


WINDOWS = time_windows(300, 8.0, 20, 1)


def windows_task(weights=True, **changes):
    row_ptr, targets = WINDOWS.canonical()
    head = np.array([WINDOWS.n], "<u4").tobytes() + np.array([targets.size], "<u8").tobytes()
    return owned(
        graph=Bytes(head + row_ptr.astype("<u8").tobytes() + targets.astype("<u4").tobytes(), None),
        vertices=WINDOWS.n,
        edges=targets.size,
        weights=Bytes(WINDOWS.weights.astype("<i8").tobytes(), None) if weights else None,
        **{"question": Question(QuestionName.INDEPENDENT_SET), **changes},
    )


def solved(one, shelf=None, tick=1.0):
    now = iter(np.arange(1000) * tick)
    answer = runner.answer(one, nearchord_solve, np.zeros(16, np.int64), lambda: float(next(now)), shelf)
    if shelf is not None:
        shelf.store()
    return answer


def told(answer):
    """Everything but the times."""
    return replace(answer, seconds=0.0, phase_seconds=())


@pytest.mark.parametrize("name", list(QuestionName))
def test_a_second_task_gives_the_same_answer_without_ordering(tmp_path, name):
    """Whatever is asked: the structure comes from the shelf."""
    shelf = Shelf(tmp_path, PLENTY, "s")
    solved(windows_task(weights=False), shelf)
    assert len(files(tmp_path)) == 1
    one = windows_task(weights=name.chooses, question=Question(name))
    again = solved(one, shelf)
    assert told(again) == told(solved(one))
    assert Phase.ORDER not in dict(again.phase_seconds)


def test_files_with_numbers_that_point_outside_never_change_an_answer(tmp_path):
    """As a defect of a solver might write them, with a right digest."""
    shelf = Shelf(tmp_path, PLENTY, "s")
    one = windows_task()
    solved(one, shelf)
    arrays = {name: array.copy() for name, array in shelf.find(one).items()}
    arrays["low"][0] = WINDOWS.n
    shelf.offer(one, arrays)
    shelf.store()
    assert told(solved(one, shelf)) == told(solved(one))
    assert Phase.ORDER not in dict(solved(one, shelf).phase_seconds)


def test_quick_solves_leave_nothing(tmp_path):
    """A file costs more than it saves."""
    shelf = Shelf(tmp_path, PLENTY, "s")
    solved(windows_task(), shelf, tick=0.001)
    assert files(tmp_path) == []


@pytest.mark.parametrize(
    "changes", [{"graph_address": ""}, {"question": Question(QuestionName.INDEPENDENT_SET, must=(1,))}]
)
def test_pinned_tasks_and_unnamed_graphs_neither_use_nor_leave_anything(tmp_path, changes):
    """What is solved there is another graph, or one that cannot be found again."""
    shelf = Shelf(tmp_path, PLENTY, "s")
    solved(replace(windows_task(), **changes), shelf)
    assert files(tmp_path) == []
