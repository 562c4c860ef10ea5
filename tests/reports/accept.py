"""Write the golden files anew after a wanted change of layout: python tests/reports/accept.py."""

import runpy
from pathlib import Path

from edgeplan import reports

HERE = Path(__file__).parent


def main() -> None:
    """Write every view of the invented record."""
    sample = runpy.run_path(str(HERE / "sample.py"))
    views = runpy.run_path(str(HERE / "test_formats.py"))["VIEWS"]
    for name, (form, record, width) in views.items():
        text = reports.render(sample[record](), form, width=width)
        (HERE.parent / "golden" / name).write_bytes(text.encode())


if __name__ == "__main__":
    main()
