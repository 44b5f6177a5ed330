"""What a reader gets: text, workbook, figures, tables."""
