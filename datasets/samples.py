"""Write the sample reports of the demos again: `python datasets/samples.py`.

Each demo's report.html goes to reports/samples/, with one figure as a picture for the README.
"""

import tempfile
from pathlib import Path

from fieldfit import read_book, reconcile

HOME = Path(__file__).parent
SAMPLES = HOME.parent / "reports" / "samples"
DEMOS = {
    "steel_walkway_girders": ".",
    "timber_floor_joists": "timber_floor_joists.xlsx",
    "concrete_transfer_beams": ".",
    "bridge_girders_vehicle": ".",
    "concrete_floor_retest": ".",
    "cyclic_floor_beams": ".",
    "levelled_bridge_pier": ".",
    "footbridge_logged_test": ".",
}
PICTURE = ("concrete_transfer_beams", "member-001-elastic-curve")


def main() -> None:
    """Reconcile every demo and keep its page."""
    for demo, book in DEMOS.items():
        with tempfile.TemporaryDirectory() as folder:
            report = reconcile(read_book((HOME / demo / book).resolve())).write(Path(folder) / demo, png=True)
            target = SAMPLES / demo / "report.html"
            target.parent.mkdir(parents=True, exist_ok=True)
            target.write_bytes(report.read_bytes())
            if demo == PICTURE[0]:
                (SAMPLES / "elastic_curve.png").write_bytes(
                    (report.parent / "figures" / f"{PICTURE[1]}.png").read_bytes()
                )


if __name__ == "__main__":
    main()
