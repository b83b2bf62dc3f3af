"""Gainbench: cascaded PI gains for DC and permanent-magnet drives, checked on the sampled loops."""
