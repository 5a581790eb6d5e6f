"""What a file leaves open, found and reported."""
