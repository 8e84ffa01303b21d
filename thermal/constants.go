package thermal

// Physical constants. They are untyped, so expressions of constants are exact until they are stored.
const (
	// Boltzmann is the Boltzmann constant, J/K. Exact: defines the kelvin in the SI of 2019 (BIPM, SI Brochure,
	// 9th edition, 2019; CODATA 2018 and 2022).
	Boltzmann = 1.380649e-23

	// Avogadro is the Avogadro constant, 1/mol. Exact: defines the mole in the SI of 2019 (same source).
	Avogadro = 6.02214076e23

	// ElementaryCharge is the charge of the proton, C. Exact: defines the ampere in the SI of 2019 (same source).
	ElementaryCharge = 1.602176634e-19

	// GasConstant is the molar gas constant R = k N_A, J/(mol K). Exact, as its factors are. Older papers print values
	// that differ by up to 6e-5 (8.314), which is 1.7e-3 in a diffusivity at 900 C and 300 kJ/mol.
	GasConstant = Boltzmann * Avogadro
)

// Units with a history, each in SI.
const (
	// ZeroCelsius is 0 degrees Celsius, K. Exact: definition of the Celsius scale (SI Brochure, 9th edition, 2019).
	ZeroCelsius = 273.15

	// FahrenheitDegree is one degree Fahrenheit, K, and ZeroFahrenheit is 0 degrees Fahrenheit, K. Exact, since the
	// scale is defined by 32 F = 0 C and 212 F = 100 C (NIST Special Publication 811, 2008, Appendix B.8).
	FahrenheitDegree = 5.0 / 9
	ZeroFahrenheit   = ZeroCelsius - 32*FahrenheitDegree

	// Day is a day of 86,400 s. Exact (SI Brochure, 9th edition, 2019, Table 8).
	Day = 86400.0

	// Year is the Julian year of 365.25 d, s: 31,557,600 s. Exact by definition (International Astronomical Union, Style
	// Manual, 1989). The annus of IUPAC and IUGS, 3.1556925445e7 s at the epoch 2000.0 (Holden et al. 2011, Pure and
	// Applied Chemistry 83, 1159-1162, doi 10.1351/PAC-REC-09-01-22), is shorter by 2.1e-5.
	Year = 365.25 * Day

	// Calorie is the thermochemical calorie, J. Exact by definition (NIST Special Publication 811, 2008, Appendix B.8).
	Calorie = 4.184

	// Electronvolt is 1 eV per particle, J/mol. Exact, as its factors are.
	Electronvolt = ElementaryCharge * Avogadro

	// Bar is 1 bar, Pa. Exact (NIST Special Publication 811, 2008, Appendix B.8).
	Bar = 1e5
)

// Molar masses, g/mol (IUPAC, abridged standard atomic weights of 2021: Prohaska et al. 2022, Pure and Applied Chemistry
// 94, 573-600, doi 10.1515/pac-2019-0603).
const (
	OxygenMass   = 15.999
	SiliconMass  = 28.085
	TitaniumMass = 47.867
)
