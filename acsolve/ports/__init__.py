"""Networks known by their numbers at frequencies: conversion, cascade, files."""
