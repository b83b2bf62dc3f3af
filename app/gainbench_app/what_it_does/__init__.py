"""The middle column: the verdict, the response over time, the loops over frequency."""
