"""The rotor by stations: finite elements, supports, gyroscopics."""
