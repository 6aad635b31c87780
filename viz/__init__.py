"""What leaves the program: tables, pictures, animations and exchange files."""
