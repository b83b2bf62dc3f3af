"""The window of Gainbench."""
