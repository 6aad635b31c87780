"""What is asked: case files, commands and examples."""
