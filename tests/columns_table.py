"""The table of output columns in DEVELOPERS.md, from the columns: python -m tests.columns_table"""

from __future__ import annotations

from canopy.columns import COLUMNS


def table() -> str:
    """Return the Markdown table."""
    lines = ["| hourly column | unit | meaning | in the balance | daily columns |", "|---|---|---|---|---|"]
    for column in COLUMNS:
        days = ", ".join(f"`{name}` ({how})" for name, how in column.days)
        lines.append(f"| `{column.name}` | {column.unit} | {column.title} | {column.part} | {days} |")
    return "\n".join(lines)


if __name__ == "__main__":
    print(table())
