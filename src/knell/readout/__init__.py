"""Floor 5: what a person reads, drawn or tabled from the dataset."""
