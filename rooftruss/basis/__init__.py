"""What is given: the job file and the tables."""
