"""draw_run writes what the folder gives and tells what it leaves out."""

from __future__ import annotations

from pathlib import Path

import pytest
from PIL import Image

from gaitlab.report.run_pictures import draw_run


@pytest.mark.slow
def test_every_picture_of_a_full_run(own_folder: Path) -> None:
    drawn = draw_run(own_folder, svg=True)
    names = {file.name for file in drawn.files}
    figures = ("ranking", "footfall", "pressure_map", "pump", "path", "spread", "sensitivities")
    assert names == {f"{name}{ending}" for name in figures for ending in (".png", ".svg")} | {
        "best.gif",
        "reversed.gif",
    }
    assert drawn.left_out == ()
    for file in drawn.files:
        assert file.stat().st_size > 2000
    with Image.open(own_folder / "best.gif") as film:
        assert film.n_frames == 3 * 22


def test_without_traces_the_rest_is_drawn(own_folder: Path) -> None:
    for trace in (own_folder / "traces").iterdir():
        trace.unlink()
    drawn = draw_run(own_folder)
    assert {"ranking.png", "footfall.png", "pressure_map.png"} <= {file.name for file in drawn.files}
    assert not (own_folder / "best.gif").exists()
    assert len(drawn.left_out) == 2
