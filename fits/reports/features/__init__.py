"""What is said of peaks and dips: sentences and tables made from the numbers of a search for features."""
