"""What people see of a certificate."""
