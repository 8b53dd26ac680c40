"""What is compared, against which margin, on which independent unit."""
