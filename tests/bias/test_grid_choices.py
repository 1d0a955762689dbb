# SPDX-License-Identifier: Apache-2.0
import pytest
from bias_records import listed, plain
from numpy.random import default_rng

from chronos_acc.bias.grid import CHOICES, default_choices, read_choices
from chronos_acc.bias.grid.variants import combinations, expanded
from chronos_acc.errors import WrongUse


def written(tmp_path, text):
    path = tmp_path / "mine.toml"
    path.write_text(text)
    return path


def test_defaults_read_back(tmp_path):
    found = read_choices(written(tmp_path, default_choices().to_toml()))
    assert dict(found.options) == dict(default_choices().options) and found.origin == "mine.toml"
    assert found.hash == default_choices().hash and len(found.hash) == 16


def test_a_choice_not_named_keeps_its_first_default(tmp_path):
    found = read_choices(written(tmp_path, '[arbitrary]\npredictor = ["order", "log10_age"]\n[own]\npredictor = "log10_age"\n'))
    assert found.options["predictor"] == ("order", "log10_age") and found.own == {"predictor": "log10_age"}
    assert all(len(found.options[c.name]) == 1 for c in CHOICES if c.name != "predictor")


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("[arbitrery]\n", r"no table \[arbitrery\] \(did you mean 'arbitrary'\?\)"),
        ("[arbitrary]\npredictr = ['order']\n", "no choice 'predictr' .did you mean 'predictor'"),
        ("[question]\npredictor = ['order']\n", r"predictor belongs in \[arbitrary\], not in \[question\]"),
        ("[arbitrary]\npredictor = 'order'\n", "must be a list"),
        ("[arbitrary]\nestimator = ['olds']\n", "estimator cannot be 'olds' .did you mean 'ols'"),
        ("[question]\nmin_support = [0]\n", "min_support cannot be 0; allowed are a number from 1 on"),
        ("[own]\nestimator = 'theil_sen'\n", "not among its options"),
        ("[own]\nheight = 1\n", "no choice 'height'"),
        ("arbitrary = 3\n", "must be a table"),
        ("[arbitrary\n", "is not TOML"),
    ],
)
def test_wrong_files_are_refused_in_one_line(tmp_path, text, message):
    with pytest.raises(WrongUse, match=message) as refused:
        read_choices(written(tmp_path, text))
    assert "\n" not in str(refused.value)


def test_missing_file():
    with pytest.raises(WrongUse, match="cannot be read"):
        read_choices("no/such/file.toml")


def test_spelled_out_for_a_record():
    record = listed(default_rng(1), truth=60, lists=3)
    options, notes = expanded(default_choices(), record)
    assert options["lists"] == ("all", "without list 1", "without list 2", "without list 3") and not notes
    every = combinations(options, {})
    # the slope: 3 datings, 3 ends, 2 short, 3 predictors, 2 estimators; the rate: 3 datings and 2 ends; both: 4 lists and 2 supports
    assert len(every) == 8 * (108 + 6)
    assert sum(c.own for c in every) == 1 and every[0].own
    assert len({tuple(c.options.values()) for c in every}) == len(every)
    one, notes = expanded(default_choices(), plain(default_rng(1), 20))
    assert one["lists"] == ("all",) and one["dates"] == ("pooled",) and "one list only" in notes[0]


def test_options_the_record_does_not_have():
    record = listed(default_rng(1), truth=60, lists=3)
    choices = default_choices()
    with pytest.raises(WrongUse, match="without list 9"):
        expanded(type(choices)({**choices.options, "lists": ("without list 9",)}), record)
    with pytest.raises(WrongUse, match="category: 'glass' is not in the record"):
        expanded(type(choices)({**choices.options, "category": ("glass",)}), record)
