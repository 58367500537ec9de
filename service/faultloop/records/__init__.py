"""What is remembered: tables, migrations, the writer, queries. Keeps bytes; computes nothing."""
