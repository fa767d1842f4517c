"""Holds what the compiler derived against SymPy.

Reads one task a line (JSON) from standard input, writes one verdict a line. A task carries formulas in
the model language, as given and as derived; nothing of the compiler's own mathematics is used here:
formulas are read by Python's parser, differentiated by SymPy and compared by mpmath to 50 digits, at
points inside the ranges the task declares. A difference that SymPy reduces to zero needs no points.
"""

import ast
import json
import random
import re
import sys

import mpmath
import sympy

POINTS = 4
# Operations in a difference that is quickly multiplied out.
MAX_EXPANDED = 60
ATTEMPTS = 60
# 50 digits must agree; 40 more are carried for what cancels.
mpmath.mp.dps = 90
TOLERANCE = mpmath.mpf(10) ** -50
# Carried before two values are said to differ.
MANY_DIGITS = 500


class NoValue(Exception):
    """The formula has no real value at this point."""


def far(a, b):
    """Whether two values differ by more than is lost in evaluating them."""
    return abs(a - b) > TOLERANCE * (1 + abs(a))


def require(condition):
    if not condition:
        raise NoValue


def real(value):
    """A value that came out real and finite."""
    if isinstance(value, mpmath.mpc):
        require(abs(value.imag) <= TOLERANCE * (1 + abs(value.real)))
        value = value.real
    require(mpmath.isfinite(value) and abs(value) < mpmath.mpf(10) ** 200)
    return value


def power(a, b):
    if b == int(b):
        require(a != 0 or b > 0)
        return mpmath.power(a, int(b))
    require(a > 0 or (a == 0 and b > 0))
    return mpmath.power(a, b)


def within(low, high, f, closed=True):
    def function(x):
        require(low <= x <= high and (closed or low < x < high))
        return f(x)

    return function


def positive(f, closed=False):
    def function(x):
        require(x > 0 or (closed and x == 0))
        return f(x)

    return function


NO_VALUE = (NoValue, ZeroDivisionError, OverflowError, ValueError, TypeError)

INFINITY = mpmath.inf
REAL_FUNCTIONS = {
    "exp": within(-1e4, 1e4, mpmath.exp),
    "log": positive(mpmath.log),
    "sqrt": positive(mpmath.sqrt, closed=True),
    "abs": abs,
    "sin": mpmath.sin,
    "cos": mpmath.cos,
    "tan": mpmath.tan,
    "asin": within(-1, 1, mpmath.asin),
    "acos": within(-1, 1, mpmath.acos),
    "atan": mpmath.atan,
    "sinh": within(-1e4, 1e4, mpmath.sinh),
    "cosh": within(-1e4, 1e4, mpmath.cosh),
    "tanh": mpmath.tanh,
    "asinh": mpmath.asinh,
    "acosh": within(1, INFINITY, mpmath.acosh),
    "atanh": within(-1, 1, mpmath.atanh, closed=False),
    "cbrt": lambda x: mpmath.sign(x) * mpmath.cbrt(abs(x)),
    "erf": mpmath.erf,
    "normal_cdf": mpmath.ncdf,
    "normal_pdf": mpmath.npdf,
    "normal_quantile": within(
        0, 1, lambda u: mpmath.sqrt(2) * mpmath.erfinv(2 * u - 1), closed=False
    ),
    "min": min,
    "max": max,
    "sign": mpmath.sign,
}

SYMPY_FUNCTIONS = {
    "abs": sympy.Abs,
    "cbrt": lambda x: x ** sympy.Rational(1, 3),
    "normal_cdf": lambda x: (1 + sympy.erf(x / sympy.sqrt(2))) / 2,
    "normal_pdf": lambda x: sympy.exp(-(x**2) / 2) / sympy.sqrt(2 * sympy.pi),
    "normal_quantile": lambda u: sympy.sqrt(2) * sympy.erfinv(2 * u - 1),
    "min": sympy.Min,
    "max": sympy.Max,
}


def tree(text):
    """The tree of a formula; decimals are kept as text, since they are exact."""
    quoted = re.sub(
        r"(?<![\w.])(\d+(?:\.\d+)?(?:[eE][+-]?\d+)?)(?![\w.])", r'"\1"', text
    )
    return ast.parse(quoted.replace("^", "**"), mode="eval").body


def syntax(text):
    """The trees of a formula's named parts, in the order in which they build on each other, and its own.
    Long formulas are written `p2^2 + p2 where p1 = ...; p2 = ...`."""
    whole, _, named = text.partition(" where ")
    parts = [part.split(" = ", 1) for part in named.split("; ") if part]
    return [(name, tree(part)) for name, part in parts], tree(whole)


class Reader:
    """Walks a formula's tree; the subclasses say what the pieces mean."""

    def formula(self, formula):
        parts, whole = formula
        self.named = {}
        for name, part in parts:
            self.named[name] = self.read(part)
        return self.read(whole)

    def read(self, node):
        match node:
            case ast.Constant(value=str(digits)):
                return self.number(digits)
            case ast.Name(id="pi"):
                return self.pi()
            case ast.Name(id=name):
                return self.named[name] if name in self.named else self.symbol(name)
            case ast.UnaryOp(op=ast.USub(), operand=inner):
                return -self.read(inner)
            case ast.BinOp(left=left, op=operation, right=right):
                return self.binary(operation, self.read(left), self.read(right))
            case ast.Call(func=ast.Name(id=name), args=arguments):
                return self.call(name, [self.read(a) for a in arguments])
        raise SyntaxError(ast.dump(node))

    def binary(self, operation, a, b):
        match operation:
            case ast.Add():
                return a + b
            case ast.Sub():
                return a - b
            case ast.Mult():
                return a * b
            case ast.Div():
                return self.quotient(a, b)
            case ast.Pow():
                return self.power(a, b)
        raise SyntaxError(ast.dump(operation))


class Value(Reader):
    """The real value at a point."""

    def __init__(self, point):
        self.point = point

    def number(self, digits):
        return mpmath.mpf(digits)

    def pi(self):
        return +mpmath.pi

    def symbol(self, name):
        return self.point[name]

    def quotient(self, a, b):
        require(b != 0)
        return a / b

    def power(self, a, b):
        require(abs(b) < 1e4)
        return real(power(a, b))

    def call(self, name, arguments):
        return real(REAL_FUNCTIONS[name](*arguments))


class Formula(Reader):
    """The formula as SymPy has it."""

    def __init__(self, symbols):
        self.symbols = symbols

    def number(self, digits):
        return sympy.Rational(digits)

    def pi(self):
        return sympy.pi

    def symbol(self, name):
        return self.symbols[name]

    def quotient(self, a, b):
        return a / b

    def power(self, a, b):
        # SymPy would write the number out.
        require(not (a.is_Number and b.is_Number and abs(b) > 1000))
        return a**b

    def call(self, name, arguments):
        return SYMPY_FUNCTIONS.get(name, getattr(sympy, name, None))(*arguments)


class Task:
    """One task: its symbols with their ranges, and points in them."""

    def __init__(self, task):
        self.task = task
        self.ranges = task["ranges"]
        self.symbols = {
            name: sympy.Symbol(name, real=True, positive=(low >= 0) or None)
            for name, (low, high) in self.ranges.items()
        }
        self.random = random.Random(task["id"])

    def formula(self, text):
        return Formula(self.symbols).formula(syntax(text))

    def points(self):
        for _ in range(ATTEMPTS):
            yield {
                name: mpmath.mpf(self.random.randint(1, 10**15 - 1)) / 10**15 * (high - low)
                + low
                for name, (low, high) in self.ranges.items()
            }

    def compare(self, reference, texts):
        """Whether a SymPy formula has the value of a derived one wherever both have one; `texts` are
        the derived formula, and formulas that must have a real value for a point to count."""
        derived, guards = texts[0], texts[1:]
        mine = self.formula(derived)
        difference = reference - mine
        if difference.count_ops() < MAX_EXPANDED and sympy.expand(difference) == 0:
            return "agree", "reduced to zero"
        names = list(self.symbols)
        evaluate = sympy.lambdify([self.symbols[n] for n in names], reference, "mpmath")
        formulas = [syntax(text) for text in texts]
        used = 0
        for point in self.points():
            def both():
                values = [Value(point).formula(f) for f in formulas]
                return real(evaluate(*[point[n] for n in names])), real(values[0])

            try:
                expected, found = both()
                if far(expected, found):
                    with mpmath.workdps(MANY_DIGITS):
                        expected, found = both()
            except NO_VALUE:
                continue
            if far(expected, found):
                shown = {n: mpmath.nstr(v, 8) for n, v in point.items()}
                return "differ", f"{expected} but {found} at {shown}: {derived}"
            used += 1
            if used == POINTS:
                break
        return ("agree", f"{used} points") if used else ("skipped", "no point has a value")


def differentiate(reference, symbol):
    return sympy.diff(reference, symbol)


def derivative(task):
    t = task.task
    return [task.compare(
        differentiate(task.formula(t["formula"]), task.symbols[t["by"]]), [t["result"], t["formula"]]
    )]


def same(task):
    """Two formulas that the compiler says are equal: a shape of one normal form, or a proof."""
    formulas = [syntax(task.task[side]) for side in ("left", "right")]
    used = 0
    for point in task.points():
        both = lambda: [real(Value(point).formula(f)) for f in formulas]
        try:
            a, b = both()
            if far(a, b):
                with mpmath.workdps(MANY_DIGITS):
                    a, b = both()
        except NO_VALUE:
            continue
        if far(a, b):
            return [("differ", f"{a} and {b} at {point}")]
        used += 1
        if used == POINTS:
            break
    return [("agree", f"{used} points") if used else ("skipped", "no point has a value")]


def witness(task):
    """Two formulas that the compiler says are different at a point it names."""
    t = task.task
    # A symbol that drops out of the formulas when they are made is not named.
    point = {name: mpmath.mpf(low + high) / 2 for name, (low, high) in task.ranges.items()}
    point.update({name: mpmath.mpf(value) for name, value in t["point"].items()})
    for name, (low, high) in t["declared"].items():
        if not (low < point[name] and (high is None or point[name] < high)):
            return [("differ", f"{name} = {point[name]} is out of range")]
    try:
        values = [real(Value(point).formula(syntax(t[side]))) for side in ("left", "right")]
    except NO_VALUE:
        # `sqrt(y)^2` is made y, which has a value where the text has none.
        return [("skipped", f"no value at {point}")]
    if values[0] == values[1] or abs(values[0] - values[1]) < TOLERANCE * abs(values[0]):
        return [("differ", f"both are {values[0]} at {point}")]
    return [("agree", "differs there")]


def ito(task):
    """Ito's rule: F_t + sum a_i F_i + 1/2 sum F_ij (B R B')_ij, and sum F_i B_ij for each driver."""
    t = task.task
    f = task.formula(t["formula"])
    states = {n: task.symbols[n] for n in t["states"]}
    drift = {n: task.formula(s["drift"]) for n, s in t["states"].items()}
    drivers = list(t["noise"])
    noise = {
        n: {d: task.formula(s["diffusion"].get(d, "0")) for d in drivers}
        for n, s in t["states"].items()
    }
    correlation = task.formula(t["correlation"])
    first = differentiate(f, task.symbols["t"]) + sum(
        drift[n] * differentiate(f, x) for n, x in states.items()
    )
    second = 0
    for n, x in states.items():
        for m, y in states.items():
            rate = sum(
                noise[n][d] * noise[m][e] * (1 if d == e else correlation)
                for d in drivers
                for e in drivers
            )
            second += rate * differentiate(differentiate(f, x), y) / 2
    guards = [t["formula"]] + [
        part
        for s in t["states"].values()
        for part in [s["drift"], *s["diffusion"].values()]
    ]
    results = [
        task.compare(first, [t["chain_rule"], *guards]),
        task.compare(second, [t["correction"], *guards]),
        task.compare(first + second, [t["drift"], *guards]),
    ]
    for d in drivers:
        reference = sum(noise[n][d] * differentiate(f, x) for n, x in states.items())
        results.append(task.compare(reference, [t["noise"][d], *guards]))
    return results


KINDS = {"derivative": derivative, "same": same, "witness": witness, "ito": ito}


def main():
    for line in sys.stdin:
        task = json.loads(line)
        try:
            results = KINDS[task["kind"]](Task(task))
        except NoValue:
            results = [("skipped", "a number too large")]
        differing = [note for verdict, note in results if verdict == "differ"]
        agreeing = all(verdict == "agree" for verdict, _ in results)
        verdict = "differ" if differing else "agree" if agreeing else "skipped"
        print(json.dumps({"id": task["id"], "verdict": verdict, "notes": differing}))


if __name__ == "__main__":
    main()
