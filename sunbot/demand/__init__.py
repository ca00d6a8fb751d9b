"""Duty cycle and rails: loads in, `Demand` at the battery out."""
