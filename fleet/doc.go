// Package fleet says what the system is made of: machines, converters, load, losses
// and hours. It reads a case (one YAML file and CSV files of hourly series), judges
// it, and resolves it into the plain numbers of one hour.
package fleet
