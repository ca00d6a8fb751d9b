"""Cells and controller: W/m2 and degC in, W at the battery (`Supply`) out."""
