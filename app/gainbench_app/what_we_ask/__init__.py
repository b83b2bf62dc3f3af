"""The right column: what is asked of each loop, and what the findings say."""
