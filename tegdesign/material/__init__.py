"""What Seebeck coefficient, resistivity and thermal conductivity a material has at a temperature."""
