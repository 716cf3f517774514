"""Writes field_arithmetic.json: random exact expressions with values from two general-purpose libraries.

    pip install python-flint mpmath
    python make_field_arithmetic.py > field_arithmetic.json

Whether a value is zero is decided by FLINT's exact algebraic numbers (qqbar); the decimals come from mpmath with 700
places, cut to 230. Neither shares code with this crate. The seed is fixed, so the file can be made again.
"""

import json
import random
from fractions import Fraction

import mpmath
from flint.types._gr import gr_complex_qqbar_ctx

mpmath.mp.dps = 700
PLACES = 230
Q = gr_complex_qqbar_ctx.new()
RANDOM = random.Random(20402)


class Number:
    """A text of the table file's grammar, its exact value (computed when asked), its decimals, a bound of its degree."""

    def __init__(self, text, exact, value, degree):
        self.text, self.lazy, self.value, self.degree = text, exact, value, degree

    def exact(self):
        return self.lazy()

    def seems_zero(self):
        return abs(self.value) < mpmath.mpf(10) ** -600


def rational(f):
    text = str(f) if f.denominator == 1 else f"({f})"
    if f < 0:
        text = f"({f})"
    return Number(text, lambda: Q(f.numerator) / Q(f.denominator), mpmath.mpf(f.numerator) / f.denominator, 1)


def some_rational():
    return rational(Fraction(RANDOM.randint(-9, 9), RANDOM.randint(1, 7)))


def square_root(a):
    return Number(f"sqrt({a.text})", lambda: a.exact().sqrt(), mpmath.sqrt(a.value), 2 * a.degree)


def totient(n):
    return sum(1 for i in range(1, n + 1) if mpmath.libmp.gcd(i, n) == 1) if n > 1 else 1


def exact_cosine(p, q):
    turn = Q.pow(Q(-1), Q(1) / Q(q))
    power = Q.pow(turn, Q(p))
    return (power + Q(1) / power) / Q(2)


def exact_sine(p, q):
    return exact_cosine(q - 2 * p, 2 * q)


def circular(name, p, q):
    text = f"{name}({p}/{q}*pi)"
    angle = mpmath.pi * p / q
    if name == "cos":
        return Number(text, lambda: exact_cosine(p, q), mpmath.cos(angle), max(1, totient(2 * q) // 2))
    if name == "sin":
        return Number(text, lambda: exact_sine(p, q), mpmath.sin(angle), max(1, totient(4 * q) // 2))
    exact = lambda: exact_sine(p, q) / exact_cosine(p, q)
    return Number(text, exact, mpmath.tan(angle), max(1, totient(4 * q) // 2))


def root(degree, a):
    value = mpmath.root(a, degree)
    near = mpmath.nstr(value, 4)
    return Number(f"root(x^{degree} - {a}, {near})", lambda: Q.pow(Q(a), Q(1) / Q(degree)), value, degree)


def atom():
    kind = RANDOM.randrange(8)
    if kind < 2:
        return some_rational()
    if kind < 4:
        return square_root(rational(Fraction(RANDOM.choice([2, 3, 5, 6, 7, 8, 10, 12]), RANDOM.choice([1, 1, 3, 4]))))
    if kind < 6:
        name = RANDOM.choice(["cos", "cos", "sin", "tan"])
        p, q = RANDOM.choice([(1, 3), (1, 4), (2, 5), (1, 5), (2, 7), (3, 7), (3, 8), (2, 9), (5, 12)])
        if name != "cos" and q > 5:
            name = "cos"
        return circular(name, p, q)
    return root(RANDOM.choice([3, 3, 4, 5]), RANDOM.choice([2, 3, 5, 11]))


def combine(op, a, b):
    degree = a.degree * b.degree
    text = f"({a.text} {op} {b.text})"
    if op == "+":
        return Number(text, lambda: a.exact() + b.exact(), a.value + b.value, degree)
    if op == "-":
        return Number(text, lambda: a.exact() - b.exact(), a.value - b.value, degree)
    if op == "*":
        return Number(text, lambda: a.exact() * b.exact(), a.value * b.value, degree)
    if b.seems_zero():
        return combine("+", a, b)
    return Number(text, lambda: a.exact() / b.exact(), a.value / b.value, degree)


def power(a, n):
    if a.seems_zero() and n < 0:
        n = -n
    return Number(f"({a.text})^{n}", lambda: Q.pow(a.exact(), Q(n)), a.value**n, a.degree)


def tree(depth):
    if depth == 0:
        return atom()
    a, b = tree(depth - 1), tree(depth - 1 if RANDOM.random() < 0.6 else 0)
    number = combine(RANDOM.choice("+-*/"), a, b)
    chance = RANDOM.random()
    if chance < 0.15:
        return power(number, RANDOM.choice([-2, 2, 3]))
    if chance < 0.25 and number.value > 0 and not number.seems_zero() and number.degree <= 6:
        return square_root(number)
    return number


def zero_in_disguise():
    kind = RANDOM.randrange(6)
    if kind == 0:
        a, b = RANDOM.sample([2, 3, 5, 6, 7, 10], 2)
        product = combine("*", square_root(rational(Fraction(a))), square_root(rational(Fraction(b))))
        return combine("-", product, square_root(rational(Fraction(a * b))))
    if kind == 1:
        # sqrt(a + b + 2 sqrt(ab)) = sqrt(a) + sqrt(b)
        a, b = RANDOM.sample([2, 3, 5, 7, 11], 2)
        inner = combine("*", rational(Fraction(2)), square_root(rational(Fraction(a * b))))
        inner = combine("+", rational(Fraction(a + b)), inner)
        outer = combine("+", square_root(rational(Fraction(a))), square_root(rational(Fraction(b))))
        return combine("-", square_root(inner), outer)
    if kind == 2:
        # cos 3a = 4 cos^3 a - 3 cos a
        q = RANDOM.choice([5, 7, 9])
        c = circular("cos", 1, q)
        triple = combine("-", combine("*", rational(Fraction(4)), power(c, 3)), combine("*", rational(Fraction(3)), c))
        return combine("-", circular("cos", 3, q), triple)
    if kind == 3:
        a, n = RANDOM.choice([2, 3, 5, 6]), RANDOM.choice([3, 4, 5])
        return combine("-", power(root(n, a), n), rational(Fraction(a)))
    if kind == 4:
        q = RANDOM.choice([3, 5, 8])
        squares = combine("+", power(circular("sin", 1, q), 2), power(circular("cos", 1, q), 2))
        return combine("-", squares, rational(Fraction(1)))
    a = tree(1)
    b = combine("*", combine("+", a, rational(Fraction(1))), combine("-", a, rational(Fraction(1))))
    return combine("-", b, combine("-", power(a, 2), rational(Fraction(1))))


def nearly_zero():
    a = tree(1)
    places = RANDOM.choice([20, 40, 80, 120])
    cut = int(mpmath.floor(a.value * mpmath.mpf(10) ** places)) + RANDOM.choice([0, 1])
    return combine("-", a, rational(Fraction(cut, 10**places)))


def record(number):
    zero = bool(number.exact().is_zero())
    assert zero == number.seems_zero(), number.text
    cut = int(mpmath.nint(number.value * mpmath.mpf(10) ** PLACES))
    sign = 0 if zero else (1 if number.value > 0 else -1)
    return {"text": number.text, "sign": sign, "value_times_10_to_230": str(cut)}


def wanted(make, count):
    found, texts = [], set()
    while len(found) < count:
        number = make()
        if number.degree <= 16 and abs(number.value) < 10**6 and number.text not in texts:
            texts.add(number.text)
            found.append(record(number))
    return found


def main():
    rows = wanted(lambda: tree(RANDOM.choice([1, 2, 2, 3])), 220)
    rows += wanted(zero_in_disguise, 45)
    rows += wanted(nearly_zero, 45)
    print(json.dumps({"places": PLACES, "expressions": rows}, indent=0))


main()
