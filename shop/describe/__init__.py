"""What is said of a wing file: lines for the screen, records, doubts."""
