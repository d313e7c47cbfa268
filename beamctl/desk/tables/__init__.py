"""What is done with named tables, on House, Rig, Wire and the caps."""
