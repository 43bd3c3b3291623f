"""What is handed over, as PDF."""
