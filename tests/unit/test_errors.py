"""Errors: one line per problem, and the exit status of each kind."""

import pytest

from chainsim import errors


def test_scenario_error_prints_one_line_for_each_problem():
    error = errors.ScenarioError(
        [
            errors.Problem("lift.toml", 4, "chain.pitch", "'12,7 mm'", "write a decimal point"),
            errors.Problem("lift.toml", None, "drive", "", "a lift needs a drive"),
            errors.Problem("lift.toml", 9, "", "", "unclosed string"),
        ]
    )
    assert str(error).splitlines() == [
        "lift.toml:4: chain.pitch: found '12,7 mm'; write a decimal point",
        "lift.toml: drive: a lift needs a drive",
        "lift.toml:9: unclosed string",
    ]


@pytest.mark.parametrize(
    ("error", "status"),
    [
        (errors.ScenarioError([]), 2),
        (errors.UnitError(""), 2),
        (errors.CallError(""), 2),
        (errors.LayoutError(""), 2),
        (errors.RecordingError(""), 2),
        (errors.RunError(""), 3),
        (errors.Interrupted(""), 130),
    ],
)
def test_exit_status_follows_the_contract(error, status):
    assert isinstance(error, errors.ChainsimError)
    assert error.exit_status == status


def test_unit_error_is_a_value_error_so_that_a_validator_may_collect_it():
    assert issubclass(errors.UnitError, ValueError)


def test_remark_names_its_key():
    assert str(errors.Remark("balls.mass", "1000 kg is heavy")) == "balls.mass: 1000 kg is heavy"
    assert str(errors.Remark("", "nothing is limited")) == "nothing is limited"
