"""The left column: what is on the bench."""
