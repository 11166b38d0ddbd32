"""The quote workbook: one small module per concern; `book.write_workbook` makes it."""
