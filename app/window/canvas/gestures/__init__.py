"""One class for each thing a hand does on the canvas."""
