"""What one run found, written to a folder and read back."""
