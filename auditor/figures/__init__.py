"""From integer tallies to figures with intervals; every figure is declared once."""
