"""What the lists of the window show: models over rows, never over a whole roll of photos."""
