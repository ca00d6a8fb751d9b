"""Chemistries, the pack and the step-by-step balance: `Supply` and `Demand` in, `Balance` out."""
