"""What was recorded on one walk-down: survey file, frames, regions."""
