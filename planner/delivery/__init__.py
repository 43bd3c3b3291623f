"""What oxygen adds to the air breathed: devices, their effect, and the amount that reaches a target."""
