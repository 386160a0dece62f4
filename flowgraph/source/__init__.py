"""Files as the user wrote them: text, spans into it, and what is said about a span."""
