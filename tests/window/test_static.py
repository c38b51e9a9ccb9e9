"""Lists of ready cells."""

from __future__ import annotations

import numpy as np

from reconciler.window.copying import as_text
from reconciler.window.sheet import Cell
from reconciler.window.static import static_sheet


def test_static_sheet() -> None:
    sheet = static_sheet([("What", 0, False, 0), ("Amount", 90, True, 1)], [(Cell("b"), Cell("−2.00")), (Cell("a"), Cell("1.00"))])
    assert sheet.columns[0].fit
    assert [cell.text for cell in sheet.columns[1].show(None, np.array([1, 0]))] == ["1.00", "−2.00"]
    sheet.sort("column0")
    assert sheet.shown.tolist() == [1, 0]
    assert as_text(sheet, np.array([0])) == "What\tAmount\nb\t-2.00\n"
