"""Floor 3: config, cells, verdicts and the dataset."""
