"""Names that SymPy's parser or Python itself would not read as a free symbol."""

RESERVED: frozenset[str] = frozenset(
    """
    Abs AccumBounds Add Adjoint AlgebraicField AlgebraicNumber And AppliedPredicate
    ArithmeticError Array AssertionError AssumptionsContext Atom AtomicExpr AttributeError
    BaseException BaseExceptionGroup BasePolynomialError Basic BlockDiagMatrix BlockMatrix
    BlockingIOError BrokenPipeError BufferError BytesWarning CC CRootOf Catalan Chi
    ChildProcessError Ci Circle CoercionFailed Complement ComplexField ComplexRegion
    ComplexRootOf Complexes ComputationFailed ConditionSet ConnectionAbortedError
    ConnectionError ConnectionRefusedError ConnectionResetError Contains CosineTransform Curve
    DeferredVector DenseNDimArray DeprecationWarning Derivative Determinant DiagMatrix
    DiagonalMatrix DiagonalOf Dict DiracDelta DisjointUnion Domain DomainError DotProduct Dummy
    E E1 EOFError EPath EX EXRAW Ei Eijk Ellipse Ellipsis EmptySequence EmptySet EncodingWarning
    EnvironmentError Eq Equality Equivalent EulerGamma EvaluationFailed ExactQuotientFailed
    Exception ExceptionGroup Expr ExpressionDomain ExtraneousFactors FF FF_gmpy FF_python FU
    FallingFactorial False FileExistsError FileNotFoundError FiniteField FiniteSet FlagError
    Float FloatingPointError FourierTransform FractionField Function FunctionClass
    FunctionMatrix FutureWarning GF GMPYFiniteField GMPYIntegerRing GMPYRationalField Ge
    GeneratorExit GeneratorsError GeneratorsNeeded GeometryError GoldenRatio GramSchmidt
    GreaterThan GroebnerBasis Gt HadamardPower HadamardProduct HankelTransform Heaviside
    HeuristicGCDFailed HomomorphismFailed I IOError ITE Id Identity Idx ImageSet
    ImmutableDenseMatrix ImmutableDenseNDimArray ImmutableMatrix ImmutableSparseMatrix
    ImmutableSparseNDimArray Implies ImportError ImportWarning IndentationError IndexError
    Indexed IndexedBase Integer IntegerRing Integers Integral InterruptedError Intersection
    Interval Inverse InverseCosineTransform InverseFourierTransform InverseHankelTransform
    InverseLaplaceTransform InverseMellinTransform InverseSineTransform IsADirectoryError
    IsomorphismFailed KeyError KeyboardInterrupt KroneckerDelta KroneckerProduct LC LM LT Lambda
    LambertW LaplaceTransform Le LessThan LeviCivita Li Limit Line Line2D Line3D LookupError Lt
    MatAdd MatMul MatPow Matrix MatrixBase MatrixExpr MatrixPermute MatrixSlice MatrixSymbol Max
    MellinTransform MemoryError Min Mod ModuleNotFoundError Monomial Mul
    MultivariatePolynomialError MutableDenseMatrix MutableDenseNDimArray MutableMatrix
    MutableSparseMatrix MutableSparseNDimArray N NDimArray NameError Nand Naturals Naturals0 Ne
    NonSquareMatrixError None Nor Not NotADirectoryError NotAlgebraic NotImplemented
    NotImplementedError NotInvertible NotReversible Number NumberSymbol O OSError OmegaPower
    OneMatrix OperationNotSupported OptionError Options Or Order Ordinal OverflowError POSform
    Parabola PendingDeprecationWarning Permanent PermissionError PermutationMatrix Piecewise
    Plane Point Point2D Point3D PoleError PolificationFailed Poly Polygon
    PolynomialDivisionFailed PolynomialError PolynomialRing Pow PowerSet PrecisionExhausted
    Predicate ProcessLookupError Product ProductSet PurePoly PythonFiniteField PythonIntegerRing
    PythonRational Q QQ QQ_I QQ_gmpy QQ_python Quaternion RR Range Rational RationalField
    Rationals Ray Ray2D Ray3D RealField RealNumber Reals RecursionError ReferenceError
    RefinementFailed RegularPolygon Rel Rem ResourceWarning RisingFactorial RootOf RootSum
    RuntimeError RuntimeWarning S SOPform Segment Segment2D Segment3D SeqAdd SeqFormula SeqMul
    SeqPer Set ShapeError Shi Si Sieve SineTransform SingularityFunction SparseMatrix
    SparseNDimArray StopAsyncIteration StopIteration StrPrinter StrictGreaterThan StrictLessThan
    Subs Sum Symbol SymmetricDifference SympifyError SyntaxError SyntaxWarning SystemError
    SystemExit TabError TableForm TimeoutError Trace Transpose Triangle TribonacciConstant True
    Tuple TypeError UnboundLocalError Unequality UnevaluatedExpr UnicodeDecodeError
    UnicodeEncodeError UnicodeError UnicodeTranslateError UnicodeWarning UnificationFailed Union
    UnivariatePolynomialError UniversalSet UserWarning ValueError Warning Wild WildFunction Xor
    Ynm Ynm_c ZZ ZZ_I ZZ_gmpy ZZ_python ZeroDivisionError ZeroMatrix Znm abs abundance acos
    acosh acot acoth acsc acsch adjoint airyai airyaiprime airybi airybiprime aiter algebras all
    all_roots andre anext any apart apart_list appellf1 apply_finite_diff approximants
    are_similar arg arity ascii asec asech asin asinh ask assemble_partfrac_list assoc_laguerre
    assoc_legendre assuming assumptions atan atan2 atanh banded bell bernoulli besseli besselj
    besselk besselsimp bessely beta betainc betainc_regularized bin binomial
    binomial_coefficients binomial_coefficients_list block_collapse blockcut bool bool_map
    bottom_up breakpoint bspline_basis bspline_basis_set bytearray bytes cacheit calculus
    callable cancel capture carmichael cartes casoratian catalan cbrt ccode ceiling centroid
    chebyshevt chebyshevt_poly chebyshevt_root chebyshevu chebyshevu_poly chebyshevu_root
    check_assumptions checkodesol checkpdesol checksol chr classify_ode classify_pde classmethod
    closest_points cofactors collect collect_const combsimp comp compile complex compose
    composite compositepi concrete conjugate construct_domain content continued_fraction
    continued_fraction_convergents continued_fraction_iterator continued_fraction_periodic
    continued_fraction_reduce convex_hull convolution copyright cos cosh cosine_transform cot
    coth count_ops count_roots covering_product credits csc csch cse cxxcode cycle_length
    cyclotomic_poly decompogen decompose default_sort_key deg degree degree_list delattr denom
    derive_by_array det det_quick diag diagonalize_vector dict dict_merge diff difference_delta
    differentiate_finite digamma diophantine dir dirichlet_eta discrete discrete_log
    discriminant div divisor_count divisor_sigma divisors divmod doctest dotprint dsolve e
    egyptian_fraction elliptic_e elliptic_f elliptic_k elliptic_pi enumerate epath erf erf2
    erf2inv erfc erfcinv erfi erfinv euler euler_equations eval evalf evaluate exec exit exp
    exp_polar expand expand_complex expand_func expand_log expand_mul expand_multinomial
    expand_power_base expand_power_exp expand_trig expint exptrigsimp exquo external eye factor
    factor_cache factor_list factor_nc factor_system factor_terms factorial factorial2 factorint
    factorrat failing_assumptions false farthest_points fcode ff fft fibonacci field
    field_isomorphism filldedent filter finite_diff_weights flatten float floor format
    fourier_series fourier_transform fps frac fraction fresnelc fresnels frozenset fu functions
    fwht galois_group gamma gammasimp gcd gcd_list gcd_terms gcdex gegenbauer genocchi geometry
    get_contraction_structure get_indices getattr gff gff_list globals glsl_code grevlex grlex
    groebner ground_roots group gruntz hadamard_product half_gcdex hankel1 hankel2
    hankel_transform harmonic has_dups has_variety hasattr hash help hermite hermite_poly
    hermite_prob hermite_prob_poly hessian hex hn1 hn2 homogeneous_order horner hyper
    hyperexpand hypersimilar hypersimp i id idiff ifft ifwht igcd igrevlex igrlex ilcm ilex im
    imageset init_printing init_session input int integer_log integer_nthroot integrate
    interactive interactive_traversal interpolate interpolating_poly interpolating_spline
    intersecting_product intersection intervals intt inv_quick inverse_cosine_transform
    inverse_fourier_transform inverse_hankel_transform inverse_laplace_transform
    inverse_mellin_transform inverse_mobius_transform inverse_sine_transform invert is_abundant
    is_amicable is_carmichael is_convex is_decreasing is_deficient is_increasing
    is_mersenne_prime is_monotonic is_nthpow_residue is_perfect is_primitive_root
    is_quad_residue is_strictly_decreasing is_strictly_increasing is_zero_dimensional isinstance
    isolate isprime issubclass iter itermonomials j jacobi jacobi_normalized jacobi_poly
    jacobi_symbol jn jn_zeros jordan_cell jscode julia_code kronecker_product kronecker_symbol
    kroneckersimp laguerre laguerre_poly lambdify laplace_correspondence laplace_initial_conds
    laplace_transform latex lcm lcm_list legendre legendre_poly legendre_symbol len lerchphi lex
    li license limit limit_seq line_integrate linear_eq_to_matrix linsolve list list2numpy ln
    locals log logcombine loggamma lowergamma lucas map maple_code marcumq mathematica_code
    mathieuc mathieucprime mathieus mathieusprime mathml matrix2numpy
    matrix_multiply_elementwise matrix_symbols max maximum meijerg mellin_transform
    memoize_property memoryview mersenne_prime_exponent min minimal_polynomial minimum minpoly
    mobius mobius_transform mod_inverse monic motzkin multigamma multiline_latex
    multinomial_coefficients multipledispatch multiplicity n_order nan next nextprime nfloat
    nonlinsolve not_empty_in npartitions nroots nsimplify nsolve nth_power_roots_poly ntheory
    nthroot_mod ntt num_digits numbered_symbols numer object oct octave_code ode_order ones oo
    open ord ord0 ordered pager_print parallel_poly_from_expr parse_expr parsing partition
    pde_separate pde_separate_add pde_separate_mul pdiv pdsolve per perfect_power
    periodic_argument periodicity permutedims pexquo pi piecewise_exclusive piecewise_fold plot
    plot_backends plot_implicit plot_parametric plotting polar_lift polarify pollard_pm1
    pollard_rho poly poly_from_expr polygamma polylog polys posify postfixes postorder_traversal
    pow powdenest powsimp pprint pprint_try_use_unicode pprint_use_unicode pquo prefixes prem
    preorder_traversal pretty pretty_print preview prevprime prime prime_decomp prime_valuation
    primefactors primenu primeomega primepi primerange primitive primitive_element
    primitive_root primorial principal_branch print print_ccode print_fcode print_glsl print_gtk
    print_jscode print_latex print_maple_code print_mathml print_python print_rcode print_tree
    printing prod product proper_divisor_count proper_divisors property public pycode python
    quadratic_congruence quadratic_residues quit quo rad radsimp randMatrix random_poly
    randprime range rational_interpolate ratsimp ratsimpmodprime rcode rcollect re real_root
    real_roots reduce_abs_inequalities reduce_abs_inequality reduce_inequalities reduced
    reduced_totient refine refine_root register_handler release rem remove_handler repr reshape
    residue resultant reversed rf riemann_xi ring root rootof roots rot_axis1 rot_axis2
    rot_axis3 rot_ccw_axis1 rot_ccw_axis2 rot_ccw_axis3 rot_givens rotations round round_two
    rsolve rsolve_hyper rsolve_poly rsolve_ratio rust_code s satisfiable sec sech separatevars
    sequence series set setattr seterr sfield shape sieve sift sign signsimp simplify
    simplify_logic sin sinc sine_transform singularities singularityintegrate sinh slice
    smtlib_code solve solve_linear solve_linear_system solve_linear_system_LU
    solve_poly_inequality solve_poly_system solve_rational_inequalities solve_triangulated
    solve_undetermined_coeffs solve_univariate_inequality solveset sorted sqf sqf_list sqf_norm
    sqf_part sqrt sqrt_mod sqrt_mod_iter sqrtdenest srepr sring sstr sstrrepr staticmethod
    stationary_points stieltjes str strategies sturm subfactorial subresultants subsets
    substitution sum summation super swinnerton_dyer_poly symarray symbols symmetric_poly
    symmetrize sympify take tan tanh tensor tensorcontraction tensordiagonal tensorproduct
    terms_gcd test textplot threaded timed to_cnf to_dnf to_nnf to_number_field together
    topological_sort total_degree totient trace trailing transpose tribonacci trigamma trigsimp
    true trunc tuple type unbranched_argument unflatten unpolarify uppergamma use utilities var
    variations vars vectorize vfield viete vring wronskian xfield xring xthreaded yn zeros zeta
    zip zoo
    """.split()
)
