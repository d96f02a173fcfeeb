"""What a caliper looks like on a picture: for the window and for the annotated picture. No Qt."""
