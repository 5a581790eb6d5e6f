"""Springs of round wire: from wire, coils and ends to a rate, and how far from every limit."""
