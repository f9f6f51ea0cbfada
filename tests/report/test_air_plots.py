"""The picture of a duct's flow: units on the axes, the point in it, choking shaded, the same bytes twice."""

from __future__ import annotations

import numpy as np
import pytest

from gaitlab.report.air_plots import DuctCurve, duct_plot
from gaitlab.report.style import figure_bytes


def curve(point_kPa: float) -> DuctCurve:
    """An invented curve that chokes at 40 kPa."""
    down = np.linspace(1e3, 100e3, 50)
    flow = 40e-6 * np.sqrt(1 - np.clip((down - 40e3) / 60e3, 0, 1) ** 2)
    return DuctCurve(
        title="Square channel, 0.5 mm, 10 mm long",
        up_Pa=100e3,
        down_Pa=down.tolist(),
        flow_kg_s=flow.tolist(),
        laminar_kg_s=((100e3**2 - down**2) * 1e-13).tolist(),
        choking_Pa=40e3,
        point_down_Pa=1e3 * point_kPa,
        point_flow_kg_s=float(np.interp(1e3 * point_kPa, down, flow)),
    )


@pytest.mark.parametrize("point_kPa", [5.0, 60.0, 99.0])
def test_axes_title_and_point(point_kPa: float) -> None:
    figure = duct_plot(curve(point_kPa))
    (ax,) = figure.axes
    assert "kPa absolute" in ax.get_xlabel()
    assert "mg/s" in ax.get_ylabel()
    assert ax.get_title(loc="left") == "Square channel, 0.5 mm, 10 mm long"
    assert any(f"at {point_kPa:.4g} kPa" in text.get_text() for text in ax.texts)
    point = ax.lines[-1]
    assert point.get_xdata()[0] == pytest.approx(point_kPa)
    assert "choked" in [text.get_text() for text in figure.legends[0].get_texts()]


def test_choked_range_and_room_above_the_curve() -> None:
    (ax,) = duct_plot(curve(60.0)).axes
    assert ax.get_xlim() == (0.0, 100.0)
    assert ax.get_ylim()[1] == pytest.approx(1.35 * 40.0, rel=1e-3)


def test_the_same_bytes_twice() -> None:
    assert figure_bytes(duct_plot(curve(60.0)), ".png") == figure_bytes(duct_plot(curve(60.0)), ".png")
