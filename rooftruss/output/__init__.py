"""Faces: schedules, workbook, result file, terminal."""
