"""Templates, styles and fonts of the report; they ship in the wheel under this name."""
