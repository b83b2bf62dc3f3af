"""The shelf along the bottom: live, kept and other sheets' tunings side by side."""
