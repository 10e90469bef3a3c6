"""Routes: procedures of several stages, judged as one method."""
