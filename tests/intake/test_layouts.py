"""A layout file is somebody's word: what is wrong in it is named, and saving and reading it again changes nothing."""

from __future__ import annotations

from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from reconciler.intake import folder as intake
from reconciler.intake import layouts
from tests.intake import mornings


@pytest.mark.parametrize(
    ("text", "key"),
    [
        ("columns = 5", "columns"), ("[columns]\nface = 3", "columns"), ('[scale]\nface = "x"', "scale"), ('[values]\nside = "x"', "values"),
        ("[values.side]\nK = 1", "values.side"), ("[scale]\nface = 0", "scale"), ('decimal = ";"', "decimal"), ('side_told_by = "bank"', "side_told_by"),
        ("skip_rows = 'two'", "skip_rows"), ("footer = '('", "footer"), ("footer = 3", "footer"), ("brokr = 'x'", "brokr"),
        ("[columns]\nprise = 'Kurs'", "columns.prise"), ("broker = [", ""),
    ],
)  # fmt: skip
def test_faults_of_a_layout_are_named(text: str, key: str, tmp_path: Path) -> None:
    path = tmp_path / "own.toml"
    path.write_text(text)
    found, problems = layouts.from_toml(path, "layouts/own.toml")
    assert found is None
    assert key in [problem.column for problem in problems]


def test_a_bad_layout_does_not_stop_the_morning(tmp_path: Path) -> None:
    folder = mornings.sound(tmp_path)
    (folder / "layouts").mkdir()
    (folder / "layouts" / "own.toml").write_text("columns = 5")
    morning = intake.read(folder)
    assert len(morning.confirmations) == 3
    assert [problem.code for problem in morning.problems] == ["bad-layout"]


_WORDS = st.text(st.characters(codec="utf-8", exclude_categories=("Cc", "Cs")), min_size=1, max_size=12)


@given(
    st.builds(
        layouts.Layout, broker=_WORDS, file=_WORDS, decimal=st.sampled_from([None, ".", ","]), delimiter=st.sampled_from([None, ";", "\t"]),
        date=st.sampled_from([None, "%d.%m.%Y"]), side_told_by=st.sampled_from(["desk", "broker"]), skip_rows=st.sampled_from([None, 0, 3]),
        columns=st.dictionaries(st.sampled_from(layouts.FACTS), _WORDS, max_size=4),
        values=st.dictionaries(st.sampled_from(["side", "status"]), st.dictionaries(_WORDS, _WORDS, min_size=1, max_size=2), max_size=2),
        scale=st.dictionaries(st.sampled_from(["face"]), st.integers(1, 1000), max_size=1),
    )
)  # fmt: skip
def test_saved_and_read_again(tmp_path_factory: pytest.TempPathFactory, layout: layouts.Layout) -> None:
    path = tmp_path_factory.mktemp("layouts") / "own.toml"
    path.write_text(layouts.to_toml(layout), encoding="utf-8")
    again, problems = layouts.from_toml(path, "")
    assert not problems
    assert again == layout


@pytest.mark.parametrize(
    ("file", "broker"),
    [("orrin_teale_20260304.csv", "Orrin & Teale"), ("OrrinTeale 4 March.csv", "Orrin & Teale"), ("tamarisk.csv", ""), ("x_tamarisk_vane_2.txt", "Tamarisk & Vane")],
)  # fmt: skip
def test_the_broker_of_a_file(file: str, broker: str) -> None:
    assert layouts.broker_of(file, ["Orrin & Teale", "Tamarisk & Vane"]) == broker


@pytest.mark.parametrize(
    ("heading", "fact"),
    [("Your Ref.", "desk_reference"), ("Net Amount (USD)", "settlement_amount"), ("NominalAmount", "face"), ("Stückzinsen", "accrued"),
     ("Date de négociation", "trade_date"), ("Fecha valor", "settlement_date"), ("\ufeffISIN", "bond"), ("Face (000)", "face")],
)  # fmt: skip
def test_headings(heading: str, fact: str) -> None:
    assert fact in [name for name, _sure in layouts.meanings(heading)]
