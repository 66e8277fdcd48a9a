"""What the trade knows: faults, readings and limits as data, and the inference that weighs readings."""
