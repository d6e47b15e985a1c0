"""An error says what is wrong, where, and how to mend it, and says everything at once."""

import pytest

from armeval.errors import Finding, Findings, InputError, near


def test_an_error_carries_what_where_and_how_to_mend():
    error = InputError("`x` is not a number", "write a number", file="path.csv", place="row 3")
    assert str(error) == "path.csv, row 3: `x` is not a number (write a number)"
    assert error.findings == (Finding("error", "`x` is not a number", "write a number", "path.csv", "row 3"),)


def test_all_errors_are_raised_at_once_and_warnings_go_along():
    found = Findings("arm.toml")
    found.error("one", place="a")
    found.warning("doubtful")
    found.error("two", place="b")
    with pytest.raises(InputError) as caught:
        found.raise_errors()
    assert [finding.what for finding in caught.value.findings] == ["one", "doubtful", "two"]
    assert "doubtful" not in str(caught.value)


def test_warnings_alone_stop_nothing():
    found = Findings("arm.toml")
    found.warning("doubtful")
    found.raise_errors()
    assert not found.has_errors
    assert found.warnings[0].file == "arm.toml"


def test_an_error_from_further_down_is_placed_where_it_came_from():
    found = Findings("trial.toml")
    found.take(InputError("no unit"), place="feed")
    assert (found.found[0].file, found.found[0].place) == ("trial.toml", "feed")


def test_a_place_that_is_known_is_kept():
    placed = InputError("no unit", place="row 2", file="a.csv").placed(file="b.toml", place="feed")
    assert (placed.findings[0].file, placed.findings[0].place) == ("a.csv", "row 2")


def test_a_near_word_is_suggested_else_the_known_ones_are_listed():
    assert near("stifness", ["stiffness", "damping"]) == "did you mean `stiffness`?"
    assert near("zzz", ["b", "a"]) == "known here: `a`, `b`"
