// Before the first schema is made.
import './components/data/zod-without-eval';
import 'expo-router/entry';
