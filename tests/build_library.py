"""Builds canopy/data/library/summary.json, the figures that `coverings` prints, from the optics.

Run from the project root after a change of materials, coats or rows: python -m tests.build_library
"""

from __future__ import annotations

from pathlib import Path

from canopy.library_build import write_summary

SUMMARY = Path(__file__).resolve().parents[1] / "canopy" / "data" / "library" / "summary.json"


def main() -> None:
    """Write the summary."""
    write_summary(SUMMARY)
    print(SUMMARY)


if __name__ == "__main__":
    main()
