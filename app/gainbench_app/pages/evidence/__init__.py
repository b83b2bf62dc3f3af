"""The evidence page: logs from the bench, what their columns hold, and what follows from them."""
