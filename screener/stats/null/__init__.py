"""The null distribution of r: what r does when the readings really come from the family."""
