"""The guide: its pages, and the window that shows them."""
