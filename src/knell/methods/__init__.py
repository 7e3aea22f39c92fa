"""Floor 2, numbers in, numbers out: the solvers and their witnesses. No files."""
