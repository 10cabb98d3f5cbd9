"""The third room: tables, figures, page, workbook and command line."""
