"""What else the numbers say: sweeps over rates, arcs, sensitivity. Plain data for tables and pictures."""
