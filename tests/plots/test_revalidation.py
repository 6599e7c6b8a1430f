"""Pictures of a revalidation: what stands on them."""

import numpy as np

from quant.plots.revalidation import plot_history
from quant.revalidation.history import control_chart


def test_the_history_shows_values_limits_and_the_interval_of_the_change():
    values = np.r_[np.zeros(10), np.full(10, 5.0)] + np.random.default_rng(1).normal(0, 0.5, 20)
    chart = control_chart(values, 1.0, labels=[f"2026-{i:02d}" for i in range(20)])
    ax = plot_history(chart)
    drawn = [line.get_ydata() for line in ax.lines]
    assert any(np.array_equal(y, chart.values) for y in drawn)
    assert any(np.array_equal(y, chart.ewma) for y in drawn)
    assert {text.get_text() for text in ax.get_xticklabels()} <= set(chart.labels)
    legend = ax.get_legend()
    assert legend is not None
    assert "mean moved" in {text.get_text() for text in legend.get_texts()}
