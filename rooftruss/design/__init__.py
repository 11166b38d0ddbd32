"""Choice: sizes, comparison of shapes."""
