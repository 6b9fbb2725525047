"""Drawn portraits of the invented Tarn Valley Regatta, with planted faults and the sheet that answers them."""
