"""Floor 1, formulas only: backgrounds, fields and the regularised equation."""
