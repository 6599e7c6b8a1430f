"""Band tables of a few real substances, for simulated spectra.

Positions are handbook values from memory (Socrates; Pretsch; Silverstein), ±3 cm⁻¹; widths and heights are plausible,
not measured. Heights are for the pure substance (100 %) in transmission through a layer in which its strongest band has
an absorbance of about 1; scale them to the layer and the concentration unit wanted with `PureComponent.scaled`.
"""

from quant.spectra.simulate import PureComponent

ETHYL_ACETATE = PureComponent(
    "ethyl acetate",
    [
        (2984, 26, 0.16, "mixed"),
        (2940, 28, 0.06, "mixed"),
        (2909, 24, 0.04, "mixed"),
        (1741, 20, 0.92, "mixed"),
        (1448, 26, 0.10, "mixed"),
        (1374, 15, 0.35, "mixed"),
        (1300, 16, 0.06, "mixed"),
        (1241, 24, 1.00, "mixed"),
        (1098, 18, 0.12, "mixed"),
        (1047, 17, 0.52, "mixed"),
        (938, 16, 0.08, "mixed"),
        (847, 16, 0.09, "mixed"),
        (786, 18, 0.05, "mixed"),
    ],
)
"""Ester C=O 1741, CH3 1374, C-O 1241 and 1047."""

ACETONE = PureComponent(
    "acetone",
    [
        (3004, 24, 0.08, "mixed"),
        (2925, 26, 0.05, "mixed"),
        (1715, 18, 1.00, "mixed"),
        (1420, 26, 0.20, "mixed"),
        (1363, 14, 0.55, "mixed"),
        (1222, 15, 0.60, "mixed"),
        (1092, 16, 0.08, "mixed"),
        (903, 16, 0.03, "mixed"),
        (785, 16, 0.02, "mixed"),
    ],
)
"""Ketone C=O 1715, CH3 1363, C-C 1222."""

TOLUENE = PureComponent(
    "toluene",
    [
        (3062, 16, 0.12, "mixed"),
        (3027, 16, 0.30, "mixed"),
        (2920, 30, 0.20, "mixed"),
        (2872, 22, 0.09, "mixed"),
        (1605, 9, 0.13, "mixed"),
        (1496, 8, 0.40, "mixed"),
        (1460, 26, 0.16, "mixed"),
        (1379, 12, 0.07, "mixed"),
        (1081, 12, 0.09, "mixed"),
        (1030, 10, 0.10, "mixed"),
        (895, 14, 0.04, "mixed"),
        (729, 12, 1.00, "mixed"),
        (694, 9, 0.70, "mixed"),
    ],
)
"""Mono-substituted ring 729 and 694, ring 1496, aromatic C-H 3027."""

ACETONITRILE = PureComponent(
    "acetonitrile",
    [
        (3003, 22, 0.20, "mixed"),
        (2944, 18, 0.25, "mixed"),
        (2293, 12, 0.25, "mixed"),
        (2253, 10, 0.90, "mixed"),
        (1443, 40, 0.55, "mixed"),
        (1375, 14, 0.60, "mixed"),
        (1039, 18, 0.45, "mixed"),
        (918, 12, 0.50, "mixed"),
    ],
)
"""C≡N 2253 with its combination at 2293."""

WATER = PureComponent(
    "water",
    [
        (3420, 330, 1.00, "gaussian"),
        (3240, 260, 0.60, "gaussian"),
        (2125, 280, 0.05, "gaussian"),
        (1640, 80, 0.32, "mixed"),
        (690, 320, 0.50, "gaussian"),
    ],
)
"""Liquid-like water: O-H stretch about 3400 (broad), bend 1640, libration below 900."""
