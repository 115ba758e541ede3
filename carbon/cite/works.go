package cite

// The works, in order of first author. Titles, volumes and pages are from
// memory unless a check elsewhere says otherwise.
var (
	AalenJohansen1978 = &Work{Key: "aalen1978", Authors: []string{"Aalen, O. O.", "Johansen, S."}, Year: 1978,
		Title: "An empirical transition matrix for non-homogeneous Markov chains based on censored observations", Journal: "Scandinavian Journal of Statistics", Volume: "5", Pages: "141-150"}
	Abbot2012 = &Work{Key: "abbot2012", Authors: []string{"Abbot, D. S.", "Cowan, N. B.", "Ciesla, F. J."}, Year: 2012,
		Title: "Indication of insensitivity of planetary weathering behavior and habitable zone to surface land fraction", Journal: "The Astrophysical Journal", Volume: "756", Pages: "178"}
	AltTeagle1999 = &Work{Key: "alt1999", Authors: []string{"Alt, J. C.", "Teagle, D. A. H."}, Year: 1999,
		Title: "The uptake of carbon during alteration of ocean crust", Journal: "Geochimica et Cosmochimica Acta", Volume: "63", Pages: "1527-1535"}
	Andersen2013 = &Work{Key: "andersen2013", Authors: []string{"Andersen, P. K."}, Year: 2013,
		Title: "Decomposition of number of life years lost according to causes of death", Journal: "Statistics in Medicine", Volume: "32", Pages: "5278-5285"}
	Bahcall2001 = &Work{Key: "bahcall2001", Authors: []string{"Bahcall, J. N.", "Pinsonneault, M. H.", "Basu, S."}, Year: 2001,
		Title: "Solar models: current epoch and time dependences, neutrinos, and helioseismological properties", Journal: "The Astrophysical Journal", Volume: "555", Pages: "990-1012"}
	Baumeister2023 = &Work{Key: "baumeister2023", Authors: []string{"Baumeister, P.", "Tosi, N.", "Brachmann, C.", "Grenfell, J. L.", "Noack, L."}, Year: 2023,
		Title: "Redox state and interior structure control on the long-term habitability of stagnant-lid Earths", Journal: "Astronomy & Astrophysics", Volume: "675", Pages: "A122"}
	Berner1994 = &Work{Key: "berner1994", Authors: []string{"Berner, R. A."}, Year: 1994,
		Title: "GEOCARB II: a revised model of atmospheric CO2 over Phanerozoic time", Journal: "American Journal of Science", Volume: "294", Pages: "56-91"}
	BernerKothavala2001 = &Work{Key: "berner2001", Authors: []string{"Berner, R. A.", "Kothavala, Z."}, Year: 2001,
		Title: "GEOCARB III: a revised model of atmospheric CO2 over Phanerozoic time", Journal: "American Journal of Science", Volume: "301", Pages: "182-204"}
	Brady1991 = &Work{Key: "brady1991", Authors: []string{"Brady, P. V."}, Year: 1991,
		Title: "The effect of silicate weathering on global temperature and atmospheric CO2", Journal: "Journal of Geophysical Research", Volume: "96", Pages: "18101-18106"}
	BradyCarroll1994 = &Work{Key: "brady1994", Authors: []string{"Brady, P. V.", "Carroll, S. A."}, Year: 1994,
		Title: "Direct effects of CO2 and temperature on silicate weathering: possible implications for climate control", Journal: "Geochimica et Cosmochimica Acta", Volume: "58", Pages: "1853-1856"}
	BradyGislason1997 = &Work{Key: "brady1997", Authors: []string{"Brady, P. V.", "Gislason, S. R."}, Year: 1997,
		Title: "Seafloor weathering controls on atmospheric CO2 and global climate", Journal: "Geochimica et Cosmochimica Acta", Volume: "61", Pages: "965-973"}
	Brantley2023 = &Work{Key: "brantley2023", Authors: []string{"Brantley, S. L.", "Shaughnessy, A.", "Lebedeva, M. I.", "Balashov, V. N."}, Year: 2023,
		Title: "How temperature-dependent silicate weathering acts as Earth's geological thermostat", Journal: "Science", Volume: "379", Pages: "382-389"}
	Budyko1969 = &Work{Key: "budyko1969", Authors: []string{"Budyko, M. I."}, Year: 1969,
		Title: "The effect of solar radiation variations on the climate of the Earth", Journal: "Tellus", Volume: "21", Pages: "611-619"}
	ByrneGoldblatt2014 = &Work{Key: "byrne2014", Authors: []string{"Byrne, B.", "Goldblatt, C."}, Year: 2014,
		Title: "Radiative forcing at high concentrations of well-mixed greenhouse gases", Journal: "Geophysical Research Letters", Volume: "41", Pages: "152-160"}
	CaldeiraKasting1992Life = &Work{Key: "caldeira1992life", Authors: []string{"Caldeira, K.", "Kasting, J. F."}, Year: 1992,
		Title: "The life span of the biosphere revisited", Journal: "Nature", Volume: "360", Pages: "721-723"}
	CaldeiraKasting1992Ice = &Work{Key: "caldeira1992ice", Authors: []string{"Caldeira, K.", "Kasting, J. F."}, Year: 1992,
		Title: "Susceptibility of the early Earth to irreversible glaciation caused by carbon dioxide clouds", Journal: "Nature", Volume: "359", Pages: "226-228"}
	Efron1987 = &Work{Key: "efron1987", Authors: []string{"Efron, B."}, Year: 1987,
		Title: "Better bootstrap confidence intervals", Journal: "Journal of the American Statistical Association", Volume: "82", Pages: "171-185"}
	ImanConover1982 = &Work{Key: "iman1982", Authors: []string{"Iman, R. L.", "Conover, W. J."}, Year: 1982,
		Title: "A distribution-free approach to inducing rank correlation among input variables", Journal: "Communications in Statistics - Simulation and Computation", Volume: "11", Pages: "311-334"}
	Jansen1999 = &Work{Key: "jansen1999", Authors: []string{"Jansen, M. J. W."}, Year: 1999,
		Title: "Analysis of variance designs for model output", Journal: "Computer Physics Communications", Volume: "117", Pages: "35-43"}
	JoeKuo2008 = &Work{Key: "joe2008", Authors: []string{"Joe, S.", "Kuo, F. Y."}, Year: 2008,
		Title: "Constructing Sobol sequences with better two-dimensional projections", Journal: "SIAM Journal on Scientific Computing", Volume: "30", Pages: "2635-2654"}
	MarubiniValsecchi1995 = &Work{Key: "marubini1995", Authors: []string{"Marubini, E.", "Valsecchi, M. G."}, Year: 1995,
		Title: "Analysing survival data from clinical trials and observational studies", Journal: "Wiley", Kind: "book"}
	McKay1979 = &Work{Key: "mckay1979", Authors: []string{"McKay, M. D.", "Beckman, R. J.", "Conover, W. J."}, Year: 1979,
		Title: "A comparison of three methods for selecting values of input variables in the analysis of output from a computer code", Journal: "Technometrics", Volume: "21", Pages: "239-245"}
	Owen1995 = &Work{Key: "owen1995", Authors: []string{"Owen, A. B."}, Year: 1995,
		Title: "Randomly permuted (t,m,s)-nets and (t,s)-sequences", Journal: "Monte Carlo and Quasi-Monte Carlo Methods in Scientific Computing, Springer", Pages: "299-317"}
	Saltelli2010 = &Work{Key: "saltelli2010", Authors: []string{"Saltelli, A.", "Annoni, P.", "Azzini, I.", "Campolongo, F.", "Ratto, M.", "Tarantola, S."}, Year: 2010,
		Title: "Variance based sensitivity analysis of model output. Design and estimator for the total sensitivity index", Journal: "Computer Physics Communications", Volume: "181", Pages: "259-270"}
	Steinebach2023 = &Work{Key: "steinebach2023", Authors: []string{"Steinebach, G."}, Year: 2023,
		Title: "Construction of Rosenbrock-Wanner method Rodas5P and numerical benchmarks within the Julia Differential Equations package", Journal: "BIT Numerical Mathematics", Volume: "63", Pages: "27"}
	Sudret2008 = &Work{Key: "sudret2008", Authors: []string{"Sudret, B."}, Year: 2008,
		Title: "Global sensitivity analysis using polynomial chaos expansions", Journal: "Reliability Engineering & System Safety", Volume: "93", Pages: "964-979"}
	CODATA2018 = &Work{Key: "codata2018", Authors: []string{"Tiesinga, E.", "Mohr, P. J.", "Newell, D. B.", "Taylor, B. N."}, Year: 2021,
		Title: "CODATA recommended values of the fundamental physical constants: 2018", Journal: "Reviews of Modern Physics", Volume: "93", Pages: "025010"}
	CooganDosso2015 = &Work{Key: "coogan2015", Authors: []string{"Coogan, L. A.", "Dosso, S. E."}, Year: 2015,
		Title: "Alteration of ocean crust provides a strong temperature dependent feedback on the geological carbon cycle and is a primary driver of the Sr-isotopic composition of seawater", Journal: "Earth and Planetary Science Letters", Volume: "415", Pages: "38-46"}
	DaviesDavies2010 = &Work{Key: "davies2010", Authors: []string{"Davies, J. H.", "Davies, D. R."}, Year: 2010,
		Title: "Earth's surface heat flux", Journal: "Solid Earth", Volume: "1", Pages: "5-24"}
	Dessert2001 = &Work{Key: "dessert2001", Authors: []string{"Dessert, C.", "Dupré, B.", "François, L. M.", "Schott, J.", "Gaillardet, J.", "Chakrapani, G.", "Bajpai, S."}, Year: 2001,
		Title: "Erosion of Deccan Traps determined by river geochemistry: impact on the global climate and the 87Sr/86Sr ratio of seawater", Journal: "Earth and Planetary Science Letters", Volume: "188", Pages: "459-474"}
	Dickson2007 = &Work{Key: "dickson2007", Authors: []string{"Dickson, A. G.", "Sabine, C. L.", "Christian, J. R."}, Year: 2007,
		Title: "Guide to best practices for ocean CO2 measurements", Journal: "PICES Special Publication 3", Kind: "book"}
	Dickson1990 = &Work{Key: "dickson1990", Authors: []string{"Dickson, A. G."}, Year: 1990,
		Title: "Thermodynamics of the dissociation of boric acid in synthetic seawater from 273.15 to 318.15 K", Journal: "Deep-Sea Research", Volume: "37", Pages: "755-766"}
	Foley2015 = &Work{Key: "foley2015", Authors: []string{"Foley, B. J."}, Year: 2015,
		Title: "The role of plate tectonic-climate coupling and exposed land area in the development of habitable climates on rocky planets", Journal: "The Astrophysical Journal", Volume: "812", Pages: "36"}
	FoleySmye2018 = &Work{Key: "foley2018", Authors: []string{"Foley, B. J.", "Smye, A. J."}, Year: 2018,
		Title: "Carbon cycling and habitability of Earth-sized stagnant lid planets", Journal: "Astrobiology", Volume: "18", Pages: "873-896"}
	FritschButland1984 = &Work{Key: "fritsch1984", Authors: []string{"Fritsch, F. N.", "Butland, J."}, Year: 1984,
		Title: "A method for constructing local monotone piecewise cubic interpolants", Journal: "SIAM Journal on Scientific and Statistical Computing", Volume: "5", Pages: "300-304"}
	Goldblatt2013 = &Work{Key: "goldblatt2013", Authors: []string{"Goldblatt, C.", "Robinson, T. D.", "Zahnle, K. J.", "Crisp, D."}, Year: 2013,
		Title: "Low simulated radiation limit for runaway greenhouse climates", Journal: "Nature Geoscience", Volume: "6", Pages: "661-667"}
	Gough1981 = &Work{Key: "gough1981", Authors: []string{"Gough, D. O."}, Year: 1981,
		Title: "Solar interior structure and luminosity variations", Journal: "Solar Physics", Volume: "74", Pages: "21-34"}
	GrahamPierrehumbert2020 = &Work{Key: "graham2020", Authors: []string{"Graham, R. J.", "Pierrehumbert, R."}, Year: 2020,
		Title: "Thermodynamic and energetic limits on continental silicate weathering strongly impact the climate and habitability of wet, rocky worlds", Journal: "The Astrophysical Journal", Volume: "896", Pages: "115"}
	HaqqMisra2016 = &Work{Key: "haqqmisra2016", Authors: []string{"Haqq-Misra, J.", "Kopparapu, R. K.", "Batalha, N. E.", "Harman, C. E.", "Kasting, J. F."}, Year: 2016,
		Title: "Limit cycles can reduce the width of the habitable zone", Journal: "The Astrophysical Journal", Volume: "827", Pages: "120"}
	Herzberg2010 = &Work{Key: "herzberg2010", Authors: []string{"Herzberg, C.", "Condie, K.", "Korenaga, J."}, Year: 2010,
		Title: "Thermal history of the Earth and its petrological expression", Journal: "Earth and Planetary Science Letters", Volume: "292", Pages: "79-88"}
	Hunten1973 = &Work{Key: "hunten1973", Authors: []string{"Hunten, D. M."}, Year: 1973,
		Title: "The escape of light gases from planetary atmospheres", Journal: "Journal of the Atmospheric Sciences", Volume: "30", Pages: "1481-1494"}
	Hurley2000 = &Work{Key: "hurley2000", Authors: []string{"Hurley, J. R.", "Pols, O. R.", "Tout, C. A."}, Year: 2000,
		Title: "Comprehensive analytic formulae for stellar evolution as a function of mass and metallicity", Journal: "Monthly Notices of the Royal Astronomical Society", Volume: "315", Pages: "543-569"}
	IAPWSIF97 = &Work{Key: "if97", Authors: []string{"Wagner, W.", "Cooper, J. R.", "Dittmann, A."}, Year: 2000,
		Title: "The IAPWS Industrial Formulation 1997 for the thermodynamic properties of water and steam", Journal: "Journal of Engineering for Gas Turbines and Power", Volume: "122", Pages: "150-182"}
	Jaupart2007 = &Work{Key: "jaupart2007", Authors: []string{"Jaupart, C.", "Labrosse, S.", "Mareschal, J.-C."}, Year: 2007,
		Title: "Temperatures, heat and energy in the mantle of the Earth", Journal: "Treatise on Geophysics", Volume: "7", Pages: "253-303"}
	KadoyaTajika2019 = &Work{Key: "kadoya2019", Authors: []string{"Kadoya, S.", "Tajika, E."}, Year: 2019,
		Title: "Outer limits of the habitable zones in terms of climate mode and climate evolution of Earth-like planets", Journal: "The Astrophysical Journal", Volume: "875", Pages: "7"}
	Kasting1988 = &Work{Key: "kasting1988", Authors: []string{"Kasting, J. F."}, Year: 1988,
		Title: "Runaway and moist greenhouse atmospheres and the evolution of Earth and Venus", Journal: "Icarus", Volume: "74", Pages: "472-494"}
	Kasting1993 = &Work{Key: "kasting1993", Authors: []string{"Kasting, J. F.", "Whitmire, D. P.", "Reynolds, R. T."}, Year: 1993,
		Title: "Habitable zones around main sequence stars", Journal: "Icarus", Volume: "101", Pages: "108-128"}
	Kasting1991 = &Work{Key: "kasting1991", Authors: []string{"Kasting, J. F."}, Year: 1991,
		Title: "CO2 condensation and the climate of early Mars", Journal: "Icarus", Volume: "94", Pages: "1-13"}
	KastingCatling2003 = &Work{Key: "kasting2003", Authors: []string{"Kasting, J. F.", "Catling, D."}, Year: 2003,
		Title: "Evolution of a habitable planet", Journal: "Annual Review of Astronomy and Astrophysics", Volume: "41", Pages: "429-463"}
	Katz2003 = &Work{Key: "katz2003", Authors: []string{"Katz, R. F.", "Spiegelman, M.", "Langmuir, C. H."}, Year: 2003,
		Title: "A new parameterization of hydrous mantle melting", Journal: "Geochemistry, Geophysics, Geosystems", Volume: "4", Pages: "1073"}
	Kopparapu2013 = &Work{Key: "kopparapu2013", Authors: []string{"Kopparapu, R. K.", "Ramirez, R.", "Kasting, J. F.", "Eymet, V.", "Robinson, T. D.", "Mahadevan, S.", "Terrien, R. C.", "Domagal-Goldman, S.", "Meadows, V.", "Deshpande, R."}, Year: 2013,
		Title: "Habitable zones around main-sequence stars: new estimates", Journal: "The Astrophysical Journal", Volume: "765", Pages: "131"}
	Kopparapu2014 = &Work{Key: "kopparapu2014", Authors: []string{"Kopparapu, R. K.", "Ramirez, R. M.", "SchottelKotte, J.", "Kasting, J. F.", "Domagal-Goldman, S.", "Eymet, V."}, Year: 2014,
		Title: "Habitable zones around main-sequence stars: dependence on planetary mass", Journal: "The Astrophysical Journal Letters", Volume: "787", Pages: "L29"}
	KoppLean2011 = &Work{Key: "kopp2011", Authors: []string{"Kopp, G.", "Lean, J. L."}, Year: 2011,
		Title: "A new, lower value of total solar irradiance: evidence and climate significance", Journal: "Geophysical Research Letters", Volume: "38", Pages: "L01706"}
	Korenaga2008 = &Work{Key: "korenaga2008", Authors: []string{"Korenaga, J."}, Year: 2008,
		Title: "Urey ratio and the structure and evolution of Earth's mantle", Journal: "Reviews of Geophysics", Volume: "46", Pages: "RG2007"}
	KrissansenTotton2017 = &Work{Key: "krissansentotton2017", Authors: []string{"Krissansen-Totton, J.", "Catling, D. C."}, Year: 2017,
		Title: "Constraining climate sensitivity and continental versus seafloor weathering using an inverse geological carbon cycle model", Journal: "Nature Communications", Volume: "8", Pages: "15423"}
	KrissansenTotton2018 = &Work{Key: "krissansentotton2018", Authors: []string{"Krissansen-Totton, J.", "Arney, G. N.", "Catling, D. C."}, Year: 2018,
		Title: "Constraining the climate and ocean pH of the early Earth with a geological carbon cycle model", Journal: "Proceedings of the National Academy of Sciences", Volume: "115", Pages: "4105-4110"}
	Leconte2013 = &Work{Key: "leconte2013", Authors: []string{"Leconte, J.", "Forget, F.", "Charnay, B.", "Wordsworth, R.", "Pottier, A."}, Year: 2013,
		Title: "Increased insolation threshold for runaway greenhouse processes on Earth-like planets", Journal: "Nature", Volume: "504", Pages: "268-271"}
	Lehmer2020 = &Work{Key: "lehmer2020", Authors: []string{"Lehmer, O. R.", "Catling, D. C.", "Krissansen-Totton, J."}, Year: 2020,
		Title: "Carbonate-silicate cycle predictions of Earth-like planetary climates and testing the habitable zone concept", Journal: "Nature Communications", Volume: "11", Pages: "6153"}
	Lueker2000 = &Work{Key: "lueker2000", Authors: []string{"Lueker, T. J.", "Dickson, A. G.", "Keeling, C. D."}, Year: 2000,
		Title: "Ocean pCO2 calculated from dissolved inorganic carbon, alkalinity, and equations for K1 and K2", Journal: "Marine Chemistry", Volume: "70", Pages: "105-119"}
	MaherChamberlain2014 = &Work{Key: "maher2014", Authors: []string{"Maher, K.", "Chamberlain, C. P."}, Year: 2014,
		Title: "Hydrologic regulation of chemical weathering and the geologic carbon cycle", Journal: "Science", Volume: "343", Pages: "1502-1504"}
	MartyTolstikhin1998 = &Work{Key: "marty1998", Authors: []string{"Marty, B.", "Tolstikhin, I. N."}, Year: 1998,
		Title: "CO2 fluxes from mid-ocean ridges, arcs and plumes", Journal: "Chemical Geology", Volume: "145", Pages: "233-248"}
	McDonoughSun1995 = &Work{Key: "mcdonough1995", Authors: []string{"McDonough, W. F.", "Sun, S.-s."}, Year: 1995,
		Title: "The composition of the Earth", Journal: "Chemical Geology", Volume: "120", Pages: "223-253"}
	Menou2015 = &Work{Key: "menou2015", Authors: []string{"Menou, K."}, Year: 2015,
		Title: "Climate stability of habitable Earth-like planets", Journal: "Earth and Planetary Science Letters", Volume: "429", Pages: "20-24"}
	Millero1995 = &Work{Key: "millero1995", Authors: []string{"Millero, F. J."}, Year: 1995,
		Title: "Thermodynamics of the carbon dioxide system in the oceans", Journal: "Geochimica et Cosmochimica Acta", Volume: "59", Pages: "661-677"}
	Mucci1983 = &Work{Key: "mucci1983", Authors: []string{"Mucci, A."}, Year: 1983,
		Title: "The solubility of calcite and aragonite in seawater at various salinities, temperatures, and one atmosphere total pressure", Journal: "American Journal of Science", Volume: "283", Pages: "780-799"}
	MurphyKoop2005 = &Work{Key: "murphy2005", Authors: []string{"Murphy, D. M.", "Koop, T."}, Year: 2005,
		Title: "Review of the vapour pressures of ice and supercooled water for atmospheric applications", Journal: "Quarterly Journal of the Royal Meteorological Society", Volume: "131", Pages: "1539-1565"}
	Myhre1998 = &Work{Key: "myhre1998", Authors: []string{"Myhre, G.", "Highwood, E. J.", "Shine, K. P.", "Stordal, F."}, Year: 1998,
		Title: "New estimates of radiative forcing due to well mixed greenhouse gases", Journal: "Geophysical Research Letters", Volume: "25", Pages: "2715-2718"}
	Nakajima1992 = &Work{Key: "nakajima1992", Authors: []string{"Nakajima, S.", "Hayashi, Y.-Y.", "Abe, Y."}, Year: 1992,
		Title: "A study on the \"runaway greenhouse effect\" with a one-dimensional radiative-convective equilibrium model", Journal: "Journal of the Atmospheric Sciences", Volume: "49", Pages: "2256-2266"}
	North1975 = &Work{Key: "north1975", Authors: []string{"North, G. R."}, Year: 1975,
		Title: "Theory of energy-balance climate models", Journal: "Journal of the Atmospheric Sciences", Volume: "32", Pages: "2033-2043"}
	NorthCahalanCoakley1981 = &Work{Key: "north1981", Authors: []string{"North, G. R.", "Cahalan, R. F.", "Coakley, J. A."}, Year: 1981,
		Title: "Energy balance climate models", Journal: "Reviews of Geophysics and Space Physics", Volume: "19", Pages: "91-121"}
	IAU2015 = &Work{Key: "iau2015", Authors: []string{"Prša, A.", "Harmanec, P.", "Torres, G.", "Mamajek, E.", "Asplund, M.", "Capitaine, N.", "Christensen-Dalsgaard, J.", "Depagne, É.", "Haberreiter, M.", "Hekker, S.", "Hilton, J.", "Kopp, G.", "Kostov, V.", "Kurtz, D. W.", "Laskar, J.", "Mason, B. D.", "Milone, E. F.", "Montgomery, M.", "Richards, M.", "Schmutz, W.", "Schou, J.", "Stewart, S. G."}, Year: 2016,
		Title: "Nominal values for selected solar and planetary quantities: IAU 2015 Resolution B3", Journal: "The Astronomical Journal", Volume: "152", Pages: "41"}
	OliveiraTakahashi2021 = &Work{Key: "oliveira2021", Authors: []string{"Oliveira, I. F. D.", "Takahashi, R. H. C."}, Year: 2021,
		Title: "An enhancement of the bisection method average performance preserving minmax optimality", Journal: "ACM Transactions on Mathematical Software", Volume: "47", Pages: "5"}
	Pozzo2012 = &Work{Key: "pozzo2012", Authors: []string{"Pozzo, M.", "Davies, C.", "Gubbins, D.", "Alfè, D."}, Year: 2012,
		Title: "Thermal and electrical conductivity of iron at Earth's core conditions", Journal: "Nature", Volume: "485", Pages: "355-358"}
	RileyTongudai1967 = &Work{Key: "riley1967", Authors: []string{"Riley, J. P.", "Tongudai, M."}, Year: 1967,
		Title: "The major cation/chlorinity ratios in sea water", Journal: "Chemical Geology", Volume: "2", Pages: "263-269"}
	Rowley2002 = &Work{Key: "rowley2002", Authors: []string{"Rowley, D. B."}, Year: 2002,
		Title: "Rate of plate creation and destruction: 180 Ma to present", Journal: "Geological Society of America Bulletin", Volume: "114", Pages: "927-933"}
	SchroderSmith2008 = &Work{Key: "schroder2008", Authors: []string{"Schröder, K.-P.", "Smith, R. C."}, Year: 2008,
		Title: "Distant future of the Sun and Earth revisited", Journal: "Monthly Notices of the Royal Astronomical Society", Volume: "386", Pages: "155-163"}
	SchubertStevensonCassen1980 = &Work{Key: "schubert1980", Authors: []string{"Schubert, G.", "Stevenson, D.", "Cassen, P."}, Year: 1980,
		Title: "Whole planet cooling and the radiogenic heat source contents of the Earth and Moon", Journal: "Journal of Geophysical Research", Volume: "85", Pages: "2531-2538"}
	Shapley1953 = &Work{Key: "shapley1953", Authors: []string{"Shapley, L. S."}, Year: 1953,
		Title: "A value for n-person games", Journal: "Contributions to the Theory of Games, Annals of Mathematics Studies", Volume: "28", Pages: "307-317"}
	SleepZahnle2001 = &Work{Key: "sleep2001", Authors: []string{"Sleep, N. H.", "Zahnle, K."}, Year: 2001,
		Title: "Carbon dioxide cycling and implications for climate on ancient Earth", Journal: "Journal of Geophysical Research", Volume: "106", Pages: "1373-1399"}
	Solomatov1995 = &Work{Key: "solomatov1995", Authors: []string{"Solomatov, V. S."}, Year: 1995,
		Title: "Scaling of temperature- and stress-dependent viscosity convection", Journal: "Physics of Fluids", Volume: "7", Pages: "266-274"}
	SpanWagner1996 = &Work{Key: "span1996", Authors: []string{"Span, R.", "Wagner, W."}, Year: 1996,
		Title: "A new equation of state for carbon dioxide covering the fluid region from the triple-point temperature to 1100 K at pressures up to 800 MPa", Journal: "Journal of Physical and Chemical Reference Data", Volume: "25", Pages: "1509-1596"}
	Tout1996 = &Work{Key: "tout1996", Authors: []string{"Tout, C. A.", "Pols, O. R.", "Eggleton, P. P.", "Han, Z."}, Year: 1996,
		Title: "Zero-age main-sequence radii and luminosities as analytic functions of mass and metallicity", Journal: "Monthly Notices of the Royal Astronomical Society", Volume: "281", Pages: "257-262"}
	TurcotteSchubert2002 = &Work{Key: "turcotte2002", Authors: []string{"Turcotte, D. L.", "Schubert, G."}, Year: 2002,
		Title: "Geodynamics", Journal: "Cambridge University Press", Kind: "book"}
	Velbel1993 = &Work{Key: "velbel1993", Authors: []string{"Velbel, M. A."}, Year: 1993,
		Title: "Temperature dependence of silicate weathering in nature: how strong a negative feedback on long-term accumulation of atmospheric CO2 and global greenhouse warming?", Journal: "Geology", Volume: "21", Pages: "1059-1062"}
	Uppstrom1974 = &Work{Key: "uppstrom1974", Authors: []string{"Uppström, L. R."}, Year: 1974,
		Title: "The boron/chlorinity ratio of deep-sea water from the Pacific Ocean", Journal: "Deep-Sea Research", Volume: "21", Pages: "161-162"}
	WagnerPruss2002 = &Work{Key: "wagner2002", Authors: []string{"Wagner, W.", "Pruß, A."}, Year: 2002,
		Title: "The IAPWS Formulation 1995 for the thermodynamic properties of ordinary water substance for general and scientific use", Journal: "Journal of Physical and Chemical Reference Data", Volume: "31", Pages: "387-535"}
	Walker1981 = &Work{Key: "walker1981", Authors: []string{"Walker, J. C. G.", "Hays, P. B.", "Kasting, J. F."}, Year: 1981,
		Title: "A negative feedback mechanism for the long-term stabilization of Earth's surface temperature", Journal: "Journal of Geophysical Research", Volume: "86", Pages: "9776-9782"}
	Weiss1974 = &Work{Key: "weiss1974", Authors: []string{"Weiss, R. F."}, Year: 1974,
		Title: "Carbon dioxide in water and seawater: the solubility of a non-ideal gas", Journal: "Marine Chemistry", Volume: "2", Pages: "203-215"}
	WestGalyBickle2005 = &Work{Key: "west2005", Authors: []string{"West, A. J.", "Galy, A.", "Bickle, M."}, Year: 2005,
		Title: "Tectonic and climatic controls on silicate weathering", Journal: "Earth and Planetary Science Letters", Volume: "235", Pages: "211-228"}
	West2012 = &Work{Key: "west2012", Authors: []string{"West, A. J."}, Year: 2012,
		Title: "Thickness of the chemical weathering zone and implications for erosional and climatic drivers of weathering and for carbon-cycle feedbacks", Journal: "Geology", Volume: "40", Pages: "811-814"}
	White1992 = &Work{Key: "white1992", Authors: []string{"White, R. S.", "McKenzie, D.", "O'Nions, R. K."}, Year: 1992,
		Title: "Oceanic crustal thickness from seismic measurements and rare earth element inversions", Journal: "Journal of Geophysical Research", Volume: "97", Pages: "19683-19715"}
	WhiteBlum1995 = &Work{Key: "white1995", Authors: []string{"White, A. F.", "Blum, A. E."}, Year: 1995,
		Title: "Effects of climate on chemical weathering in watersheds", Journal: "Geochimica et Cosmochimica Acta", Volume: "59", Pages: "1729-1747"}
	WilliamsKasting1997 = &Work{Key: "williams1997", Authors: []string{"Williams, D. M.", "Kasting, J. F."}, Year: 1997,
		Title: "Habitable planets with high obliquities", Journal: "Icarus", Volume: "129", Pages: "254-267"}
	Wilson1927 = &Work{Key: "wilson1927", Authors: []string{"Wilson, E. B."}, Year: 1927,
		Title: "Probable inference, the law of succession, and statistical inference", Journal: "Journal of the American Statistical Association", Volume: "22", Pages: "209-212"}
	Zeng2016 = &Work{Key: "zeng2016", Authors: []string{"Zeng, L.", "Sasselov, D. D.", "Jacobsen, S. B."}, Year: 2016,
		Title: "Mass-radius relation for rocky planets based on PREM", Journal: "The Astrophysical Journal", Volume: "819", Pages: "127"}
)
