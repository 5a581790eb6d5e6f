"""What a file says of the scatter from build to build, and what follows from it."""
