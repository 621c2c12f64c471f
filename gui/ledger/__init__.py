"""What is known of the specimen."""
